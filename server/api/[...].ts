/** What is no route of the API is an error in the one form, not the start page of the application. */
export default defineEventHandler(() => {
  throw notFound('This address of the API')
})
