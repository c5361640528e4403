import { lookAtUpload } from '../../services/imports/resumableUploads'

export default defineEventHandler(async (event) => {
  const { caller, place } = await tusRequest(event)
  const upload = await lookAtUpload(database(), place, caller.userId, getRouterParam(event, 'id')!)
  setResponseHeaders(event, { 'Upload-Offset': String(upload.offset), 'Upload-Length': String(upload.length), 'Cache-Control': 'no-store', ...(upload.importId === null ? {} : { 'Import-Id': String(upload.importId) }) })
  return ''
})
