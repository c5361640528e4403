import type { Knex } from 'knex'
import { encodeBlock } from '../../db/blocks/encodeBlock'
import { writeLoopWeeks } from '../../db/repositories/loopWeekWrites'
import { findLoop } from '../../db/repositories/loops'
import { storeBlocks } from '../../db/repositories/trendBlocks'
import { loopWeekColumns } from '../../server/services/assessments/loopWeekColumns'
import { loopSetup } from '../../server/services/loops/loopSetup'
import { getSettings } from '../../server/services/settings'
import { assessLoopWeek } from '../../shared/assessment/assessLoopWeek'
import type { LoopRecord } from '../../shared/assessment/types'
import { weekFrame } from '../../shared/assessment/week/isoWeek'
import { simulateOnOff } from '../../shared/control/onOff/simulateOnOff'
import { simulateClosedLoop } from '../../shared/control/simulation/simulateClosedLoop'
import { noiseFor } from '../../shared/tuning/noiseFor'

/** a week and an area of their own, so that other tests keep their counts */
export const TUNING_WEEK = '2026-W45'
/** what is built into the loops: TIC-5501 in % of span and s; TIC-5502 in its own units */
export const TRUTH = { 'TIC-5501': { processGain: 1.6, timeConstant: 400, deadTime: 80 }, 'TIC-5502': { processGain: 1.2, timeConstant: 900, deadTime: 60, hysteresis: 2 } } as const
const INTERVAL_S = 10
const SAMPLES = 3 * 8640

/** Three days of a PI loop whose set point moves now and then, in % of span. */
export function loopOfKnownModel({ samples = SAMPLES, noise = 0.05, model = TRUTH['TIC-5501'] } = {}): { pv: Float64Array, sp: Float64Array, op: Float64Array } {
  const out = { pv: new Float64Array(samples), sp: new Float64Array(samples), op: new Float64Array(samples) }
  const process = { kind: 'fopdt' as const, ...model }
  // a hold on the set point for hours, then up by 8 %, then back: each piece starts at rest
  const piece = 1440
  for (let at = 0, k = 0; at < samples; at += piece, k++) {
    const up = k % 2 === 0
    const r = simulateClosedLoop({ model: process, controller: { controllerGain: 1.2, integralTime: 400, derivativeTime: 0 }, horizon: piece * INTERVAL_S, step: INTERVAL_S / 5, setpoint: { at: 3600, size: up ? 8 : -8 }, start: up ? { pv: 40, op: 40 } : { pv: 48, op: 45 }, noise: { standardDeviation: noise, interval: INTERVAL_S, normal: noiseFor(100 + k) } })
    for (let i = 0; i < piece && at + i < samples; i++) for (const [to, from] of [['pv', 'measured'], ['sp', 'sp'], ['op', 'op']] as const) out[to][at + i] = r[from][i * 5]
  }
  return out
}

export function onOffOfKnownModel(samples = 8640): { pv: Float64Array, sp: Float64Array, op: Float64Array } {
  const t = TRUTH['TIC-5502']
  // rest of 20 degrees at output 0
  const r = simulateOnOff({ ...t, outputLow: 0, outputHigh: 100, setpoint: 60 }, { horizon: (samples + 1) * INTERVAL_S, startPv: 55, step: 2 })
  const every = Math.round(INTERVAL_S / (r.time[1] - r.time[0]))
  const pick = (x: Float64Array, add = 0) => Float64Array.from({ length: samples }, (_, i) => x[i * every] + add)
  const noise = noiseFor(7)
  return { pv: pick(r.pv, 20).map(v => v + 0.05 * noise()), sp: pick(r.sp, 20), op: pick(r.op) }
}

/** Two loops of the dryers with samples and an assessed week, for the tuning desk; answers their ids by tag. */
export async function tuningPlant(db: Knex): Promise<Record<string, number>> {
  await db('areas').insert([{ name: 'Dryers', position: 3 }]).onConflict('name').ignore()
  const area = await db('areas').where({ name: 'Dryers' }).first('id')
  const settings = await getSettings(db)
  const frame = weekFrame(TUNING_WEEK, settings.zone)
  const ids: Record<string, number> = {}
  const made = { 'TIC-5501': loopOfKnownModel(), 'TIC-5502': onOffOfKnownModel() }
  for (const [tag, signals] of Object.entries(made)) {
    const onOff = tag === 'TIC-5502'
    const [{ id }] = await db('loops').insert({
      tag, description: onOff ? 'drying cabinet' : 'preheat zone', area_id: area.id, type: 'temperature', priority: 2, pv_low: 0, pv_high: onOff ? 200 : 1000, pv_unit: '°C', settling_s: onOff ? 3600 : 1800,
      ...(onOff ? { form: 'onOff', hysteresis: TRUTH['TIC-5502'].hysteresis } : { form: 'series', gain: 1.2, integral_time: 400 / 60, time_unit: 'min' }),
    }).returning('id')
    ids[tag] = id
    const n = signals.pv.length
    const scale = onOff ? 1 : 10
    const t = Float64Array.from({ length: n }, (_, i) => frame.hourEdges[0] + i * INTERVAL_S * 1000)
    const round = (x: Float64Array, digits: number) => x.map(v => Number(v.toFixed(digits)))
    const record: LoopRecord = { t, pv: round(signals.pv.map(v => v * scale), 2), sp: signals.sp.map(v => v * scale), op: round(signals.op, 2), mode: null, modeNames: [] }
    const blocks = []
    for (let from = 0; from < n;) {
      let to = from
      while (to < n && Math.floor(t[to] / 86_400_000) === Math.floor(t[from] / 86_400_000)) to++
      blocks.push(encodeBlock(id, record, from, to))
      from = to
    }
    await storeBlocks(db, blocks)
    const loop = (await findLoop(db, tag))!
    const setup = loopSetup(loop, settings)
    const assessment = assessLoopWeek(record, setup, frame, [])
    await writeLoopWeeks(db as never, [{ loopId: id, week: TUNING_WEEK, cause: 'test', columns: loopWeekColumns(assessment, { priority: setup.priority, version: loop.version, weekStartMs: frame.hourEdges[0] }), detail: JSON.stringify(assessment) }])
  }
  return ids
}
