import { ticketFileSchema } from '../../../../../shared/schemas/tickets'
import { readFile } from '../../../../services/tickets/files'

const SHOWN = ['image/jpeg', 'image/png', 'image/webp']

/** Photos may be shown; everything else is only handed over. Nothing in a file can run here. */
export default defineEventHandler(async (event) => {
  await requireRole(event, 'viewer', 'read')
  const { id, fileId } = await readInput(event, ticketFileSchema, 'params')
  const { file, bytes } = await readFile(database(), fileStorage(), id, fileId)
  const text = file.mediaType.startsWith('text/')
  setResponseHeaders(event, {
    'Content-Type': text ? `${file.mediaType}; charset=utf-8` : file.mediaType,
    'Content-Disposition': `${SHOWN.includes(file.mediaType) ? 'inline' : 'attachment'}; filename="${file.name.replace(/[^\x20-\x7E]|["\\%]/g, '_')}"; filename*=UTF-8''${encodeURIComponent(file.name).replace(/['()*]/g, c => `%${c.charCodeAt(0).toString(16).toUpperCase()}`)}`,
    'Content-Security-Policy': 'default-src \'none\'; sandbox',
    'X-Content-Type-Options': 'nosniff',
  })
  return bytes
})
