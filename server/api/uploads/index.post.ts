import { beginUpload } from '../../services/imports/resumableUploads'

export default defineEventHandler(async (event) => {
  const { caller, place } = await tusRequest(event)
  const id = await beginUpload(database(), place, caller.userId, getHeader(event, 'upload-length'), getHeader(event, 'upload-metadata'))
  setResponseStatus(event, 201)
  setHeader(event, 'Location', `/api/uploads/${id}`)
  return null
})
