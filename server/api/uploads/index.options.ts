/** What this server can do, as tus asks it; nothing of the site is in it. */
export default defineEventHandler((event) => {
  setResponseHeaders(event, { 'Tus-Resumable': TUS_VERSION, 'Tus-Version': TUS_VERSION, 'Tus-Extension': 'creation,termination', 'Tus-Max-Size': String(environment().UPLOAD_LIMIT_BYTES) })
  setResponseStatus(event, 204)
  return null
})
