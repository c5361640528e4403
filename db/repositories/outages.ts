import type { Database } from '../knex'

export interface Outage { id: number, areaId: number | null, area: string | null, from: Date, to: Date, reason: string, createdBy: string | null }
export interface OutageInput { areaId: number | null, from: Date, to: Date, reason: string }

const base = (db: Database) => db('outages as o').leftJoin('areas as a', 'a.id', 'o.area_id').leftJoin('users as u', 'u.id', 'o.created_by')
  .select('o.id', 'o.area_id', 'a.name as area', 'o.from_at', 'o.to_at', 'o.reason', 'u.name as maker')

const toOutage = (r: any): Outage => ({ id: r.id, areaId: r.area_id, area: r.area, from: r.from_at, to: r.to_at, reason: r.reason, createdBy: r.maker })

export async function listOutages(db: Database): Promise<Outage[]> {
  return (await base(db).orderBy('o.from_at', 'desc')).map(toOutage)
}

export async function findOutage(db: Database, id: number): Promise<Outage | null> {
  const row = await base(db).where('o.id', id).first()
  return row ? toOutage(row) : null
}

export async function insertOutage(db: Database, o: OutageInput & { createdBy: number | null }): Promise<number> {
  const [row] = await db('outages').insert({ area_id: o.areaId, from_at: o.from, to_at: o.to, reason: o.reason, created_by: o.createdBy }).returning('id')
  return row.id
}

export async function updateOutage(db: Database, id: number, o: OutageInput): Promise<void> {
  await db('outages').where({ id }).update({ area_id: o.areaId, from_at: o.from, to_at: o.to, reason: o.reason })
}

export async function deleteOutage(db: Database, id: number): Promise<void> {
  await db('outages').where({ id }).delete()
}
