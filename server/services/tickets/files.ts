import { randomUUID } from 'node:crypto'
import type { Readable } from 'node:stream'
import type { Knex } from 'knex'
import { insertAudit } from '../../../db/repositories/audit'
import { findTicket, findTicketFile, findTicketFileByKey, insertTicketEvent, insertTicketFile, type TicketFile } from '../../../db/repositories/tickets'
import { atLeast } from '../../../shared/types/people'
import { Refusal } from '../refusal'
import { mediaTypeOf } from './mediaTypeOf'
import { noSuchTicket } from './refusals'
import { writtenAt } from './writtenAt'
import type { Actor } from './caller'

/** Where files lie: a folder outside the web root, or a bucket (see server/utils/fileStorage.ts). */
export interface FileStorage {
  setItemRaw: (key: string, bytes: Uint8Array) => Promise<void>
  getItemRaw: (key: string) => Promise<unknown>
  removeItem: (key: string) => Promise<void>
}

export const FILE_LIMIT_BYTES = 15 * 1024 * 1024
const MOST_FILES = 200

export interface Upload { name: string, idempotencyKey: string | null, at?: Date }

/** Adds a photo or file to a ticket; sent again with the same key it is the one that is there already. */
export async function addFile(db: Knex, storage: FileStorage, actor: Actor, ticketId: number, body: Readable, { name, idempotencyKey, at }: Upload): Promise<{ id: number, added: boolean }> {
  const ticket = await findTicket(db, ticketId)
  if (!ticket) throw noSuchTicket()
  const there = idempotencyKey ? await findTicketFileByKey(db, ticketId, idempotencyKey) : null
  if (there) {
    body.resume()
    return { id: there.id, added: false }
  }
  if (!atLeast(actor.role, 'engineer') && !(actor.role === 'technician' && ticket.assigneeId === actor.userId)) throw new Refusal(403, 'not_allowed', 'Only the person assigned, or an engineer, may add files.', { assignee: ticket.assignee })
  const bytes = await readCapped(body)
  const mediaType = mediaTypeOf(bytes, name)
  if (!mediaType) throw new Refusal(415, 'file_kind', 'Only photos (JPEG, PNG, WebP, HEIC), PDF and plain text or CSV can be added.')
  const key = `${ticketId}/${randomUUID()}`
  await storage.setItemRaw(key, bytes)
  try {
    const id = await db.transaction(async (trx) => {
      const added = await insertTicketFile(trx, { ticketId, key, name: plainName(name), mediaType, bytes: bytes.length, userId: actor.userId, idempotencyKey, most: MOST_FILES })
      if (added === null) return null
      await insertTicketEvent(trx, { ticketId, userId: actor.userId, actor: actor.name, kind: 'file', text: plainName(name), data: { fileId: added, mediaType, bytes: bytes.length }, at: writtenAt(at) })
      await insertAudit(trx, { userId: actor.userId, actor: actor.name, action: 'ticket.file', entity: 'ticket', entityId: ticketId, data: { fileId: added, name: plainName(name), bytes: bytes.length } })
      return added
    })
    if (id !== null) return { id, added: true }
  }
  catch (error) {
    await storage.removeItem(key).catch(() => {})
    throw error
  }
  // the same key came in twice at once, or the ticket is full
  await storage.removeItem(key)
  const other = idempotencyKey ? await findTicketFileByKey(db, ticketId, idempotencyKey) : null
  if (!other) throw new Refusal(409, 'too_many_files', `A ticket holds at most ${MOST_FILES} files.`)
  return { id: other.id, added: false }
}

export async function readFile(db: Knex, storage: FileStorage, ticketId: number, id: number): Promise<{ file: TicketFile, bytes: Uint8Array }> {
  const file = await findTicketFile(db, ticketId, id)
  const raw = file && await storage.getItemRaw(file.key)
  if (!file || !raw) throw new Refusal(404, 'not_found', 'This file was not found.')
  return { file, bytes: raw instanceof Uint8Array ? raw : new Uint8Array(raw as ArrayBuffer) }
}

async function readCapped(body: Readable): Promise<Uint8Array> {
  const chunks: Buffer[] = []
  let length = 0
  for await (const chunk of body as AsyncIterable<Buffer>) {
    length += chunk.length
    if (length > FILE_LIMIT_BYTES) throw new Refusal(413, 'too_large', 'A file may have at most 15 MB.')
    chunks.push(chunk)
  }
  if (length === 0) throw new Refusal(422, 'invalid_input', 'The file is empty.', { issues: [{ path: '', message: 'empty' }] })
  return Buffer.concat(chunks)
}

/** A name to show and to save under: no folders, no control characters. */
// eslint-disable-next-line no-control-regex -- control characters are what this is about
const plainName = (name: string) => name.replace(/[\u0000-\u001F\u007F\u202A-\u202E\u2066-\u2069]/g, '').split(/[\\/]/).pop()!.slice(-120).trim() || 'file'
