import type { Knex } from 'knex'
import { weekFrame } from '../../shared/assessment/week/isoWeek'
import { RIBBON_LETTERS, type LedgerState } from '../../shared/assessment/types'

export const FLEET_WEEK = '2026-W47'
export const FLEET_WEEK_BEFORE = '2026-W46'

type Letter = 'h' | 'm' | 'u' | 'o' | 'x' | 'd' | '.'
interface InventedLoop { tag: string, area: 'Kilns' | 'Boiler house', type: string, priority: 1 | 2 | 3, now: [Letter, number, number][], before: [Letter, number, number][], verdict: string, period?: number, ratio?: number }

/** Invented loops of two areas: a group that hunts, one left in manual, one at its limit, an upset of the kilns, healthy ones. */
export const FLEET_LOOPS: readonly InventedLoop[] = [
  ...[1, 2, 3, 4, 5, 6].map((n): InventedLoop => ({
    tag: `TIC-110${n}`, area: 'Kilns', type: 'temperature', priority: n === 1 ? 1 : 2, verdict: n === 2 ? 'huntingTuning' : 'steady', period: n === 2 ? 660 : undefined, ratio: 0.2 + n / 10,
    now: n === 2 ? [['o', 60, 64], ['h', 70, 100]] : [['o', 60, 64]], before: n === 2 ? [['h', 10, 60]] : [],
  })),
  ...[1, 2, 3].map((n): InventedLoop => ({ tag: `FIC-210${n}`, area: 'Boiler house', type: 'flow', priority: 1, verdict: n === 1 ? 'huntingValve' : 'huntingExternal', period: 2280 + n, ratio: 0.5, now: [['h', 14, 24], ['h', 38, 48]], before: [['h', 14, 20]] })),
  { tag: 'PIC-2201', area: 'Boiler house', type: 'pressure', priority: 3, verdict: 'manual', now: [['m', 40, 140]], before: [] },
  { tag: 'LIC-2301', area: 'Boiler house', type: 'level', priority: 2, verdict: 'saturated', ratio: 0.9, now: [['u', 0, 25]], before: [['u', 0, 50]] },
  { tag: 'AIC-2401', area: 'Boiler house', type: 'analysis', priority: 2, verdict: 'cannotTell', now: [['.', 0, 100], ['x', 100, 103]], before: [] },
  ...[5, 6, 7, 8].map((n): InventedLoop => ({ tag: `FIC-310${n}`, area: 'Boiler house', type: 'flow', priority: 2, verdict: 'steady', ratio: 0.8, now: [], before: [] })),
]

const states = Object.fromEntries(Object.entries(RIBBON_LETTERS).map(([state, letter]) => [letter, state as LedgerState]))

/** Puts the invented fleet into a database; the areas may be there already. Answers the ids of loops by tag. */
export async function fleetWeeks(db: Knex): Promise<Record<string, number>> {
  await db('areas').insert([{ name: 'Kilns', position: 1 }, { name: 'Boiler house', position: 2 }]).onConflict('name').ignore()
  const areas = Object.fromEntries((await db('areas').select('id', 'name')).map(a => [a.name, a.id]))
  const ids: Record<string, number> = {}
  for (const loop of FLEET_LOOPS) {
    const [{ id }] = await db('loops').insert({ tag: loop.tag, description: `${loop.area} ${loop.tag.slice(-2)}`, area_id: areas[loop.area], type: loop.type, priority: loop.priority, pv_low: 0, pv_high: 100, pv_unit: '%', tolerance: 1 }).returning('id')
    ids[loop.tag] = id
    for (const [week, spans] of [[FLEET_WEEK, loop.now], [FLEET_WEEK_BEFORE, loop.before]] as const) {
      const { hourEdges } = weekFrame(week, 'Europe/London')
      const letters = Array<string>(hourEdges.length - 1).fill('s')
      for (const [letter, from, to] of spans) letters.fill(letter, from, to)
      const hours = Object.fromEntries(Object.values(states).map(s => [s, 0]))
      for (const letter of letters) hours[states[letter]]++
      const lost = hours.manual + hours.saturated + hours.hunting + hours.offTarget + hours.sensor
      const untold = loop.verdict === 'cannotTell'
      await db('loop_weeks').insert({
        loop_id: id, week, week_start: new Date(hourEdges[0]), method_version: 'test', loop_version: 1, ribbon: letters.join(''), hours: JSON.stringify(hours),
        lost_hours: lost, weighted_lost_hours: lost * (4 - loop.priority), verdict: loop.verdict, confidence: untold ? null : 0.8,
        coverage: 1 - hours.noData / letters.length, service_factor: 1 - hours.manual / letters.length, saturation_fraction: hours.saturated / letters.length,
        iae_per_hour: untold ? null : 0.5, iae_percent_span: untold ? null : 0.5, offset: untold ? null : -0.1, standard_deviation: untold ? null : 0.7, time_in_tolerance: untold ? null : 0.9,
        oscillation_index: loop.period ? 3 : 0.2, oscillation_period: loop.period ?? null, oscillation_amplitude: loop.period ? 1.5 : null, oscillation_strength: loop.period ? 0.7 : null,
        variance_ratio: loop.ratio ?? null, variance_ratio_low: loop.ratio ? loop.ratio - 0.05 : null, variance_ratio_high: loop.ratio ? loop.ratio + 0.05 : null, headroom: loop.ratio ? 1 - loop.ratio : null,
        valve_travel_per_day: 120, reversals_per_day: 300, compression_factor: 1.2, detail: JSON.stringify({ week, verdictReason: untold ? 'Less than half of the week has usable samples.' : '' }),
      })
    }
  }
  const [{ id: groupId }] = await db('loop_groups').insert({ week: FLEET_WEEK, letter: 'A', period_s: 2280, likely_source: ids['FIC-2101'] }).returning('id')
  await db('loop_group_members').insert(['FIC-2101', 'FIC-2102', 'FIC-2103'].map((tag, i) => ({ group_id: groupId, loop_id: ids[tag], strength: 0.9 - i / 10, rank: i + 1 })))
  return ids
}
