import type { Knex } from 'knex'
import { encodeBlock } from '../../db/blocks/encodeBlock'
import { storeBlocks } from '../../db/repositories/trendBlocks'
import { seededRandom } from '../../shared/assessment/statistics/seededRandom'
import { weekFrame } from '../../shared/assessment/week/isoWeek'
import type { Verdict } from '../../shared/assessment/types'

const DAY_MS = 86_400_000

/** A flow loop in an area; answers its id. Range 0 to 100. */
export async function addLoop(db: Knex, tag: string, area = 'Glaze preparation'): Promise<number> {
  await db('areas').insert({ name: area }).onConflict('name').ignore()
  const { id: areaId } = await db('areas').where({ name: area }).first('id')
  const [row] = await db('loops').insert({ tag, description: `${tag} of the test`, area_id: areaId, type: 'flow', pv_low: 0, pv_high: 100, pv_unit: 'm³/h', gain: 1.2, integral_time: 20 }).returning('id')
  return row.id
}

/** Samples at a minute: SP 50, the error a first-order autoregressive process of the given deviation. */
export async function addSamples(db: Knex, loopId: number, fromMs: number, toMs: number, { sd, seed, sp = 50 }: { sd: number, seed: number, sp?: number }): Promise<void> {
  const random = seededRandom(seed)
  let e = 0
  for (let day = Math.floor(fromMs / DAY_MS) * DAY_MS; day < toMs; day += DAY_MS) {
    const begin = Math.max(day, fromMs)
    const n = Math.floor((Math.min(day + DAY_MS, toMs) - begin) / 60_000)
    if (n <= 0) continue
    const t = Float64Array.from({ length: n }, (_, i) => begin + i * 60_000)
    const pv = Float64Array.from({ length: n }, () => { e = 0.9 * e + Math.sqrt(1 - 0.81) * sd * random.normal(); return sp - e })
    await db.transaction(trx => storeBlocks(trx, [encodeBlock(loopId, { t, pv, sp: new Float64Array(n).fill(sp), op: new Float64Array(n).fill(40), mode: new Uint8Array(n), modeNames: ['AUTO'] })]))
  }
}

/** A loop-week as an assessment would leave it, with the given share of hours hunting, evenly spread. */
export async function addWeek(db: Knex, loopId: number, week: string, { lost = 0, verdict = 'huntingValve' }: { lost?: number, verdict?: Verdict } = {}): Promise<void> {
  const { hourEdges } = weekFrame(week, 'Europe/London')
  const length = hourEdges.length - 1
  const ribbon = Array.from({ length }, (_, k) => Math.floor((k + 1) * lost / length) > Math.floor(k * lost / length) ? 'h' : 's').join('')
  const hours = { noData: 0, down: 0, sensor: 0, manual: 0, saturated: 0, hunting: lost, offTarget: 0, steady: length - lost }
  await db('loop_weeks').insert({
    loop_id: loopId, week, week_start: new Date(hourEdges[0]!), method_version: 'test', loop_version: 1, ribbon, hours: JSON.stringify(hours), lost_hours: lost, weighted_lost_hours: 2 * lost,
    verdict, confidence: 0.9, coverage: 1, detail: JSON.stringify({ verdict, verdictReason: 'because of the test', evidence: [] }),
  }).onConflict(['loop_id', 'week']).merge()
}

export const weekSpan = (week: string) => {
  const { hourEdges } = weekFrame(week, 'Europe/London')
  return { fromMs: hourEdges[0]!, toMs: hourEdges[hourEdges.length - 1]! }
}
