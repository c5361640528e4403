import { resolve } from 'node:path'
import { importQuerySchema } from '../../services/imports/importOptions'
import { findRepeatedUpload, receiveUpload } from '../../services/imports/receiveUpload'

export default defineEventHandler(async (event) => {
  const sender = await requireRole(event, 'engineer', 'import')
  const { name, ...options } = await readInput(event, importQuerySchema, 'query')
  const { DATA_DIR, UPLOAD_LIMIT_BYTES } = environment()
  const upload = {
    name: name || 'upload', sender, dataDir: resolve(DATA_DIR), limitBytes: UPLOAD_LIMIT_BYTES, idempotencyKey: getHeader(event, 'idempotency-key')?.slice(0, 200) || null,
    // a person is asked about unknown loops; a machine cannot answer
    options: { ...options, unknown: options.unknown ?? (sender.tokenId ? 'create' as const : 'ask' as const) },
  }
  if (Number(getHeader(event, 'content-length') ?? 0) > UPLOAD_LIMIT_BYTES) {
    setHeader(event, 'connection', 'close')
    throw refusal(413, 'too_large', `The file is larger than ${UPLOAD_LIMIT_BYTES} bytes, the limit of this site.`)
  }
  const repeated = await findRepeatedUpload(database(), upload)
  if (repeated) event.node.req.resume()
  else patientBody(event)
  setResponseStatus(event, 202)
  try { return repeated ?? await receiveUpload(database(), event.node.req, upload) }
  catch (error) {
    // what is left of the body is not read: the connection ends with the answer
    setHeader(event, 'connection', 'close')
    throw error
  }
})
