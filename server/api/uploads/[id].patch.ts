import { continueUpload } from '../../services/imports/resumableUploads'

export default defineEventHandler(async (event) => {
  const { caller, place } = await tusRequest(event)
  if (getHeader(event, 'content-type') !== 'application/offset+octet-stream') throw refusal(415, 'wrong_type', 'A part of an upload is sent as application/offset+octet-stream.')
  const offset = Number(getHeader(event, 'upload-offset') ?? NaN)
  if (!Number.isSafeInteger(offset) || offset < 0) throw refusal(422, 'invalid_input', 'Upload-Offset must say where this part begins.', { issues: [{ path: 'Upload-Offset', message: 'must be a whole number' }] })
  patientBody(event)
  const answer = await continueUpload(database(), place, caller, getRouterParam(event, 'id')!, offset, event.node.req)
  setHeader(event, 'Upload-Offset', String(answer.offset))
  if (answer.importId !== null) setHeader(event, 'Import-Id', String(answer.importId))
  setResponseStatus(event, 204)
  return null
})
