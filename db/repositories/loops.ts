import type { Database } from '../knex'
import type { LoopType } from '../../shared/assessment/types'
import type { StoredTuning } from '../../shared/tuning/storedController'

/** A loop's set-up as it is stored: tuning in the controller's own form and units. null: not said, the default of the type holds. */
export interface LoopConfig extends StoredTuning {
  description: string
  areaId: number | null
  unit: string
  type: LoopType
  pvLow: number | null
  pvHigh: number | null
  pvUnit: string
  opLow: number
  opHigh: number
  normalModes: string[]
  tolerance: number | null
  priority: 1 | 2 | 3
  deadTimeS: number | null
  intervalS: number | null
  settlingS: number | null
  hysteresis: number | null
  upstream: string[]
  rangeGuessed: boolean
}
export interface LoopRow extends LoopConfig { id: number, tag: string, area: string | null, version: number, updatedAt: Date }

const COLUMNS: Record<keyof LoopConfig, string> = {
  description: 'description', areaId: 'area_id', unit: 'unit', type: 'type', pvLow: 'pv_low', pvHigh: 'pv_high', pvUnit: 'pv_unit', opLow: 'op_low', opHigh: 'op_high',
  normalModes: 'normal_modes', tolerance: 'tolerance', priority: 'priority', deadTimeS: 'dead_time_s', intervalS: 'interval_s', settlingS: 'settling_s', form: 'form', action: 'action',
  gain: 'gain', gainUnit: 'gain_unit', integralTime: 'integral_time', derivativeTime: 'derivative_time', timeUnit: 'time_unit', filterTimeS: 'filter_time_s',
  setpointWeight: 'setpoint_weight', hysteresis: 'hysteresis', upstream: 'upstream', rangeGuessed: 'range_guessed',
}
const entries = Object.entries(COLUMNS) as [keyof LoopConfig, string][]

function toLoop(r: Record<string, any>): LoopRow {
  const config = Object.fromEntries(entries.map(([key, column]) => [key, r[column]])) as unknown as LoopConfig
  return { id: r.id, tag: r.tag, area: r.area_name ?? null, version: r.version, updatedAt: r.updated_at, ...config }
}
const toRow = (config: Partial<LoopConfig>) => Object.fromEntries(entries.filter(([key]) => config[key] !== undefined).map(([key, column]) => [column, config[key]]))
const joined = (db: Database) => db('loops as l').leftJoin('areas as a', 'a.id', 'l.area_id').select('l.*', 'a.name as area_name')

export async function findLoop(db: Database, tag: string): Promise<LoopRow | null> {
  const row = await joined(db).where('l.tag', tag).first()
  return row ? toLoop(row) : null
}

export async function listLoops(db: Database, ids?: number[]): Promise<LoopRow[]> {
  const query = joined(db).orderBy('l.tag')
  if (ids) query.whereIn('l.id', ids)
  return (await query).map(toLoop)
}

/** Adds loops; those whose tag is there already are left alone. Answers tag -> id of all of them. */
export async function insertLoops(trx: Database, loops: ({ tag: string } & Partial<LoopConfig>)[]): Promise<Map<string, number>> {
  for (let at = 0; at < loops.length; at += 500) {
    for (const loop of groupByKeys(loops.slice(at, at + 500))) await trx('loops').insert(loop).onConflict('tag').ignore()
  }
  const rows = await trx('loops').whereIn('tag', loops.map(l => l.tag)).select('id', 'tag')
  return new Map(rows.map(r => [r.tag, r.id]))
}

// knex writes one statement for rows with the same columns; a missing one would become null instead of its default
function groupByKeys(loops: ({ tag: string } & Partial<LoopConfig>)[]): Record<string, unknown>[][] {
  const groups = new Map<string, Record<string, unknown>[]>()
  for (const { tag, ...config } of loops) {
    const row = { tag, ...toRow(config) }
    const key = Object.keys(row).join()
    groups.set(key, [...groups.get(key) ?? [], row])
  }
  return [...groups.values()]
}

/** Changes a loop's set-up and counts its version up; assessments name the version they were made with. */
export async function updateLoop(trx: Database, id: number, change: Partial<LoopConfig>): Promise<void> {
  await trx('loops').where({ id }).update({ ...toRow(change), version: trx.raw('version + 1'), updated_at: trx.fn.now() })
}
