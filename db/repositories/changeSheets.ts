import type { Database } from '../knex'
import type { ChangeSheet } from '../../shared/types/tuning'

export interface ChangeSheetRow { id: number, loopId: number, tag: string, ticketId: number | null, madeAt: Date, madeBy: string, sheet: ChangeSheet }

const base = (db: Database) => db('change_sheets as s').join('loops as l', 'l.id', 's.loop_id').leftJoin('users as u', 'u.id', 's.made_by').select('s.*', 'l.tag', 'u.name as maker')
const toSheet = (r: Record<string, any>): ChangeSheetRow => ({ id: r.id, loopId: r.loop_id, tag: r.tag, ticketId: r.ticket_id, madeAt: r.made_at, madeBy: r.maker ?? '', sheet: r.sheet })

export async function insertChangeSheet(trx: Database, s: { loopId: number, ticketId: number | null, userId: number | null, sheet: ChangeSheet }): Promise<number> {
  const [row] = await trx('change_sheets').insert({ loop_id: s.loopId, ticket_id: s.ticketId, made_by: s.userId, sheet: JSON.stringify(s.sheet) }).returning('id')
  return row.id
}

export async function findChangeSheet(db: Database, id: number): Promise<ChangeSheetRow | null> {
  const row = await base(db).where('s.id', id).first()
  return row ? toSheet(row) : null
}

/** Newest first. */
export async function listChangeSheets(db: Database, where: { loopId: number } | { ticketId: number }): Promise<ChangeSheetRow[]> {
  const query = base(db).orderBy('s.id', 'desc').limit(100)
  return ('loopId' in where ? await query.where('s.loop_id', where.loopId) : await query.where('s.ticket_id', where.ticketId)).map(toSheet)
}
