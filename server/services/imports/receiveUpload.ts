import { createHash, randomUUID } from 'node:crypto'
import { mkdir, open, unlink } from 'node:fs/promises'
import { join } from 'node:path'
import type { Readable } from 'node:stream'
import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findImportByKey, insertImport } from '../../../db/repositories/imports'
import { enqueue } from '../../jobs/queue'
import { Refusal } from '../refusal'
import type { ImportOptions } from './importOptions'

export interface Sender { userId: number | null, tokenId: number | null, name: string }
export interface Upload { name: string, options: ImportOptions, idempotencyKey: string | null, sender: Sender, dataDir: string, limitBytes: number }

/** Written in pieces of this size, and brought safely to disk while more comes in, so that the end has little left to wait for. */
const WRITE_AT = 1 << 20
const SYNC_EVERY = 16 << 20

const keyOf = (u: Pick<Upload, 'idempotencyKey' | 'sender'>) => u.idempotencyKey && `${u.sender.userId ? `u${u.sender.userId}` : `t${u.sender.tokenId}`}:${u.idempotencyKey}`

/** The import that an idempotency key was given to before, so that its body need not be read again. */
export async function findRepeatedUpload(db: Knex, upload: Pick<Upload, 'idempotencyKey' | 'sender'>): Promise<{ id: number, status: string } | null> {
  const key = keyOf(upload)
  const found = key ? await findImportByKey(db, key) : null
  return found && { id: found.id, status: found.status }
}

/**
 * Streams a body to the data folder, safe on disk, and then makes the import and rings for a worker in one transaction.
 * Memory stays flat: one chunk at a time.
 */
export async function receiveUpload(db: Knex, body: Readable, upload: Upload): Promise<{ id: number, status: string }> {
  const folder = join(upload.dataDir, 'uploads')
  await mkdir(folder, { recursive: true, mode: 0o700 })
  const fileKey = randomUUID()
  const path = join(folder, fileKey)
  const hash = createHash('sha256')
  let bytes = 0
  const sync = { bytes: 0, running: null as Promise<void> | null }
  try {
    const file = await open(path, 'wx', 0o600)
    try {
      let batch: Buffer[] = []
      let held = 0
      const write = async () => {
        let { bytesWritten } = await file.writev(batch)
        // a disk that is nearly full may take a part only
        for (const chunk of batch) {
          for (let at = Math.min(chunk.length, bytesWritten); at < chunk.length;) at += (await file.write(chunk, at)).bytesWritten
          bytesWritten = Math.max(0, bytesWritten - chunk.length)
        }
        if ((sync.bytes += held) >= SYNC_EVERY && !sync.running) {
          sync.bytes = 0
          sync.running = file.datasync().then(() => { sync.running = null })
          // thrown where it is awaited
          sync.running.catch(() => {})
        }
        batch = []
        held = 0
      }
      for await (const chunk of body as AsyncIterable<Buffer>) {
        bytes += chunk.length
        if (bytes > upload.limitBytes) throw new Refusal(413, 'too_large', `The file is larger than ${upload.limitBytes} bytes, the limit of this site.`)
        hash.update(chunk)
        batch.push(chunk)
        if ((held += chunk.length) >= WRITE_AT) await write()
      }
      if (held > 0) await write()
      await sync.running
      await file.sync()
    }
    finally {
      await sync.running?.catch(() => {})
      await file.close()
    }
    if (bytes === 0) throw new Refusal(422, 'invalid_input', 'The request has no body; send the file as it is.', { issues: [{ path: '', message: 'empty' }] })
    return await recordUpload(db, { ...upload, fileKey, bytes, sha256: hash.digest('hex') })
  }
  catch (error) {
    await unlink(path).catch(() => {})
    const { code } = error as NodeJS.ErrnoException
    if (code === 'ENOSPC' || code === 'EDQUOT') throw new Refusal(503, 'disk_full', 'There is no room left on the disk for uploads. Nothing was taken in.')
    if (code === 'ECONNRESET' || (error as Error).message === 'aborted') throw new Refusal(400, 'cut_short', 'The upload was cut short. Nothing was taken in.')
    throw error
  }
}

/** The import row of a file that lies in the data folder. When its idempotency key was used meanwhile, that import is the answer. */
export async function recordUpload(db: Knex, upload: Upload & { fileKey: string, bytes: number, sha256: string }): Promise<{ id: number, status: string }> {
  const key = keyOf(upload)
  const id = await db.transaction(async (trx) => {
    const made = await insertImport(trx, {
      name: upload.name, fileKey: upload.fileKey, bytes: upload.bytes, sha256: upload.sha256, idempotencyKey: key, options: { ...upload.options }, userId: upload.sender.userId, tokenId: upload.sender.tokenId,
    })
    if (made === null) return null
    await insertAudit(trx, { userId: upload.sender.userId, actor: upload.sender.name, action: 'import.upload', entity: 'import', entityId: made, data: { name: upload.name, bytes: upload.bytes } })
    await enqueue(trx, 'read-imports')
    return made
  })
  if (id !== null) return { id, status: 'received' }
  await unlink(join(upload.dataDir, 'uploads', upload.fileKey)).catch(() => {})
  return (await findRepeatedUpload(db, upload))!
}
