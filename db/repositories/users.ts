import type { Database } from '../knex'
import type { Role } from '../../shared/types/people'

export interface Notify { assignment: boolean, handBack: boolean, overdue: boolean }

export interface User {
  id: number, email: string, name: string, role: Role, demo: boolean, passwordHash: string | null, disabledAt: Date | null, notify: Notify, createdAt: Date
}

const columns = ['id', 'email', 'name', 'role', 'demo', 'password_hash', 'disabled_at', 'notify', 'created_at']

const toUser = (r: any): User => ({ id: r.id, email: r.email, name: r.name, role: r.role, demo: r.demo, passwordHash: r.password_hash, disabledAt: r.disabled_at, notify: r.notify, createdAt: r.created_at })

/** The new account's id, or null when the address already has one. */
export async function insertUser(db: Database, u: { email: string, name: string, role: Role, passwordHash: string | null, demo?: boolean }): Promise<number | null> {
  const [row] = await db('users').insert({ email: u.email, name: u.name, role: u.role, password_hash: u.passwordHash, demo: u.demo ?? false })
    .onConflict(db.raw('(lower(email))')).ignore().returning('id')
  return row?.id ?? null
}

export async function findUser(db: Database, id: number): Promise<User | null> {
  const row = await db('users').where({ id }).first(columns)
  return row ? toUser(row) : null
}

export async function findUserByEmail(db: Database, email: string): Promise<User | null> {
  const row = await db('users').whereRaw('lower(email) = lower(?)', [email]).first(columns)
  return row ? toUser(row) : null
}

export interface PersonRow { id: number, email: string, name: string, role: Role, demo: boolean, invited: boolean, disabledAt: Date | null, lastSeenAt: Date | null, createdAt: Date }

export async function listUsers(db: Database): Promise<PersonRow[]> {
  const rows = await db('users as u').orderBy('u.name').select('u.*')
    .select(db('sessions as s').whereRaw('s.user_id = u.id').max('s.last_seen_at').as('last_seen_at'))
  return rows.map(r => ({ id: r.id, email: r.email, name: r.name, role: r.role, demo: r.demo, invited: r.password_hash === null, disabledAt: r.disabled_at, lastSeenAt: r.last_seen_at, createdAt: r.created_at }))
}

export async function updateUser(db: Database, id: number, change: Partial<{ name: string, role: Role, passwordHash: string, disabledAt: Date | null, notify: Notify }>): Promise<boolean> {
  const row: Record<string, unknown> = {}
  if (change.name !== undefined) row.name = change.name
  if (change.role !== undefined) row.role = change.role
  if (change.passwordHash !== undefined) row.password_hash = change.passwordHash
  if (change.disabledAt !== undefined) row.disabled_at = change.disabledAt
  if (change.notify !== undefined) row.notify = JSON.stringify(change.notify)
  return Object.keys(row).length > 0 && await db('users').where({ id }).update(row) > 0
}

/** Accounts that can sign in. */
export async function countAccounts(db: Database, { withDemo }: { withDemo: boolean }): Promise<number> {
  const query = db('users').whereNull('disabled_at').count('* as n')
  if (!withDemo) query.where('demo', false)
  return Number((await query)[0]!.n)
}

/** Admins that can sign in, locked until the transaction ends, so that two admins cannot lock each other out at once. */
export async function lockActiveAdmins(db: Database): Promise<number[]> {
  const rows = await db('users').where({ role: 'admin' }).whereNull('disabled_at').whereNotNull('password_hash').forUpdate().select('id')
  return rows.map(r => r.id)
}

export async function listActiveNames(db: Database, { withDemo }: { withDemo: boolean }): Promise<{ id: number, name: string, role: Role }[]> {
  const query = db('users').whereNull('disabled_at').orderBy('name').select('id', 'name', 'role')
  if (!withDemo) query.where('demo', false)
  return await query
}
