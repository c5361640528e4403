import { createHash, randomBytes } from 'node:crypto'
import type { Database } from '../../db/knex'
import { findToken, insertToken, markTokenUsed } from '../../db/repositories/tokens'

export const TOKEN_SCOPES = ['read', 'import'] as const
export type TokenScope = typeof TOKEN_SCOPES[number]

const hash = (token: string) => createHash('sha256').update(token).digest('hex')

/** Makes a token; it is shown once and only its hash is kept. */
export async function makeToken(db: Database, input: { name: string, scopes: TokenScope[], createdBy: number | null }): Promise<{ id: number, token: string }> {
  const token = `fettle_${randomBytes(32).toString('base64url')}`
  const id = await insertToken(db, { ...input, tokenHash: hash(token) })
  return { id, token }
}

export async function personOfToken(db: Database, token: string): Promise<{ id: number, name: string, scopes: TokenScope[] } | null> {
  const found = await findToken(db, hash(token))
  if (found) await markTokenUsed(db, found.id)
  return found
}
