import { endUpload } from '../../services/imports/resumableUploads'

export default defineEventHandler(async (event) => {
  const { caller, place } = await tusRequest(event)
  await endUpload(database(), place, caller.userId, getRouterParam(event, 'id')!)
  setResponseStatus(event, 204)
  return null
})
