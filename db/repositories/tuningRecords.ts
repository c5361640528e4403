import type { Database } from '../knex'

export interface TuningRecord { id: number, at: Date, actor: string, kind: 'asFound' | 'asLeft' | 'imported' | 'unrecorded', tuning: Record<string, string | number | null>, reason: string, changeNumber: string | null, ticketId: number | null }

export async function insertTuningRecord(trx: Database, r: { loopId: number, ticketId: number | null, userId: number | null, actor: string, kind: TuningRecord['kind'], tuning: TuningRecord['tuning'], reason: string, changeNumber: string | null, at?: Date }): Promise<number> {
  const [row] = await trx('tuning_records').insert({
    loop_id: r.loopId, ticket_id: r.ticketId, user_id: r.userId, actor: r.actor, kind: r.kind, tuning: JSON.stringify(r.tuning), reason: r.reason, change_number: r.changeNumber, ...(r.at ? { at: r.at } : {}),
  }).returning('id')
  return row.id
}

export async function listTuningRecords(db: Database, loopId: number): Promise<TuningRecord[]> {
  const rows = await db('tuning_records').where({ loop_id: loopId }).orderBy('at', 'desc').orderBy('id', 'desc')
  return rows.map(r => ({ id: r.id, at: r.at, actor: r.actor, kind: r.kind, tuning: r.tuning, reason: r.reason, changeNumber: r.change_number, ticketId: r.ticket_id }))
}

/** As found and as left of one ticket, oldest first, with the loop they belong to. */
export async function listTuningOfTicket(db: Database, ticketId: number): Promise<(TuningRecord & { tag: string })[]> {
  const rows = await db('tuning_records as r').join('loops as l', 'l.id', 'r.loop_id').where('r.ticket_id', ticketId).orderBy('r.at').orderBy('r.id').select('r.*', 'l.tag')
  return rows.map(r => ({ id: r.id, tag: r.tag, at: r.at, actor: r.actor, kind: r.kind, tuning: r.tuning, reason: r.reason, changeNumber: r.change_number, ticketId: r.ticket_id }))
}
