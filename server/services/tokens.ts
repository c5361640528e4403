import { createHash, randomBytes } from 'node:crypto'
import type { Knex } from 'knex'
import type { Database } from '../../db/knex'
import { insertAudit } from '../../db/repositories/audit'
import { findToken, insertToken, markTokenUsed, revokeToken } from '../../db/repositories/tokens'
import type { Caller } from '../../shared/types/people'
import { Refusal } from './refusal'

export const TOKEN_SCOPES = ['read', 'import'] as const
export type TokenScope = typeof TOKEN_SCOPES[number]
type By = Pick<Caller, 'userId' | 'name'>

const hash = (token: string) => createHash('sha256').update(token).digest('hex')

/** Makes a token; it is shown once and only its hash is kept. */
export async function makeToken(db: Knex, input: { name: string, scopes: TokenScope[] }, by: By): Promise<{ id: number, token: string }> {
  const token = `fettle_${randomBytes(32).toString('base64url')}`
  return await db.transaction(async (trx) => {
    const id = await insertToken(trx, { ...input, createdBy: by.userId, tokenHash: hash(token) })
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'token.create', entity: 'token', entityId: id, data: { name: input.name, scopes: input.scopes } })
    return { id, token }
  })
}

export async function personOfToken(db: Database, token: string): Promise<{ id: number, name: string, scopes: TokenScope[] } | null> {
  const found = await findToken(db, hash(token))
  if (found) await markTokenUsed(db, found.id)
  return found
}

/** From the next request on the token is worth nothing. */
export async function endToken(db: Knex, id: number, by: By): Promise<void> {
  await db.transaction(async (trx) => {
    if (!await revokeToken(trx, id)) throw new Refusal(404, 'not_found', 'This token was not found, or was revoked before.')
    await insertAudit(trx, { userId: by.userId, actor: by.name, action: 'token.revoke', entity: 'token', entityId: id })
  })
}
