import { createHash, randomUUID } from 'node:crypto'
import { createReadStream } from 'node:fs'
import { mkdir, open, rename, stat, unlink } from 'node:fs/promises'
import { join } from 'node:path'
import type { Readable } from 'node:stream'
import type { Knex } from 'knex'
import { deleteUpload, findUpload, insertUpload, updateUpload, type UploadRow } from '../../../db/repositories/uploads'
import { Refusal } from '../refusal'
import { importQuerySchema } from './importOptions'
import { recordUpload, type Sender } from './receiveUpload'

/** Resumable uploads, tus 1.0.0 with creation and termination. What lies on disk is the truth about how far one is. */
export interface UploadPlace { dataDir: string, limitBytes: number }

const partOf = (place: UploadPlace, id: string) => join(place.dataDir, 'uploads', `${id}.part`)
const UPLOAD_ID = /^[\da-f-]{36}$/
const busy = new Set<string>()

/** `Upload-Metadata`: keys with values in base64. */
export function readMetadata(header: string | undefined): Record<string, string> {
  return Object.fromEntries((header ?? '').split(',').map(pair => pair.trim().split(/\s+/)).filter(([key]) => key).slice(0, 30)
    .map(([key, value]) => [key.slice(0, 60), Buffer.from(value ?? '', 'base64').toString('utf8').replaceAll('\0', '').slice(0, 300)]))
}

export async function beginUpload(db: Knex, place: UploadPlace, userId: number, lengthHeader: string | undefined, metadataHeader: string | undefined): Promise<string> {
  const length = Number(lengthHeader)
  if (lengthHeader === undefined || !Number.isSafeInteger(length) || length < 1) throw new Refusal(422, 'invalid_input', 'Upload-Length must say how many bytes the file has.', { issues: [{ path: 'Upload-Length', message: 'must be a whole number above 0' }] })
  if (length > place.limitBytes) throw new Refusal(413, 'too_large', `The file is larger than ${place.limitBytes} bytes, the limit of this site.`)
  const metadata = readMetadata(metadataHeader)
  const options = importQuerySchema.safeParse(metadata)
  if (!options.success) throw new Refusal(422, 'invalid_input', options.error.issues[0].message, { issues: options.error.issues.map(i => ({ path: i.path.join('.'), message: i.message })) })
  const id = randomUUID()
  await mkdir(join(place.dataDir, 'uploads'), { recursive: true, mode: 0o700 })
  await (await open(partOf(place, id), 'wx', 0o600)).close()
  await insertUpload(db, { id, userId, length, metadata })
  return id
}

export async function lookAtUpload(db: Knex, place: UploadPlace, userId: number, id: string): Promise<UploadRow & { offset: number }> {
  const upload = UPLOAD_ID.test(id) ? await findUpload(db, id, userId) : null
  if (!upload) throw new Refusal(404, 'not_found', 'This upload was not found, or is not yours.')
  if (upload.importId !== null) return { ...upload, offset: upload.length }
  const size = await stat(partOf(place, id)).then(s => s.size, () => null)
  if (size === null) throw new Refusal(404, 'not_found', 'This upload was taken away; begin again.')
  return { ...upload, offset: size }
}

/** Appends a body at an offset. With the last byte the upload becomes an import. */
export async function continueUpload(db: Knex, place: UploadPlace, sender: Sender & { userId: number }, id: string, offset: number, body: Readable): Promise<{ offset: number, importId: number | null }> {
  if (busy.has(id)) throw new Refusal(423, 'locked', 'Another request is sending this upload just now.')
  busy.add(id)
  try {
    const upload = await lookAtUpload(db, place, sender.userId, id)
    if (upload.offset !== offset) throw new Refusal(409, 'wrong_offset', `The next byte of this upload is ${upload.offset}.`, { offset: upload.offset })
    if (upload.importId !== null) return { offset: upload.length, importId: upload.importId }
    const path = partOf(place, id)
    const file = await open(path, 'a')
    let at = upload.offset
    try {
      for await (const chunk of body as AsyncIterable<Buffer>) {
        if (at + chunk.length > upload.length) throw new Refusal(413, 'too_large', 'More bytes came than Upload-Length announced.')
        for (let written = 0; written < chunk.length;) written += (await file.write(chunk, written)).bytesWritten
        at += chunk.length
      }
    }
    catch (error) {
      // the connection broke: what arrived stays, and the sender asks how far it is
      if (error instanceof Refusal || (error as NodeJS.ErrnoException).code === 'ENOSPC') throw error
    }
    finally {
      await file.sync().catch(() => {})
      await file.close()
    }
    await updateUpload(db, id, { received: at })
    if (at < upload.length) return { offset: at, importId: null }
    return { offset: at, importId: await complete(db, place, sender, upload, path) }
  }
  finally { busy.delete(id) }
}

async function complete(db: Knex, place: UploadPlace, sender: Sender, upload: UploadRow, path: string): Promise<number> {
  const hash = createHash('sha256')
  for await (const chunk of createReadStream(path, { highWaterMark: 1 << 20 })) hash.update(chunk as Buffer)
  const { name, ...options } = importQuerySchema.parse(upload.metadata)
  await rename(path, join(place.dataDir, 'uploads', upload.id))
  const { id } = await recordUpload(db, {
    name: name || upload.metadata.filename || 'upload', options: { ...options, unknown: options.unknown ?? 'ask' }, idempotencyKey: `tus ${upload.id}`, sender, ...place,
    fileKey: upload.id, bytes: upload.length, sha256: hash.digest('hex'),
  })
  await updateUpload(db, upload.id, { importId: id })
  return id
}

export async function endUpload(db: Knex, place: UploadPlace, userId: number, id: string): Promise<void> {
  const upload = await lookAtUpload(db, place, userId, id)
  if (busy.has(id)) throw new Refusal(423, 'locked', 'Another request is sending this upload just now.')
  if (upload.importId === null) await unlink(partOf(place, id)).catch(() => {})
  await deleteUpload(db, id)
}
