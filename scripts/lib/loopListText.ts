import type { LoopSetup } from '../../shared/assessment/types'

export interface ListedLoop { setup: LoopSetup, description: string, area: string, unit: string, intervalS: number }

const COLUMNS: [string, (loop: ListedLoop) => string | number | null][] = [
  ['tag', l => l.setup.tag], ['description', l => l.description], ['area', l => l.area], ['unit', l => l.unit], ['type', l => l.setup.type],
  ['pvLow', l => l.setup.pvLow], ['pvHigh', l => l.setup.pvHigh], ['pvUnit', l => l.setup.pvUnit],
  ['opLow', l => l.setup.opLow], ['opHigh', l => l.setup.opHigh], ['normalModes', l => l.setup.normalModes.join(' ')],
  ['tolerance', l => l.setup.tolerance], ['priority', l => l.setup.priority], ['deadTime', l => l.setup.deadTimeS], ['interval', l => l.intervalS],
  ['form', l => l.setup.form], ['action', l => l.setup.action], ['gain', l => l.setup.gain], ['integralTime', l => l.setup.integralTimeS],
  ['derivativeTime', l => l.setup.derivativeTimeS], ['filterTime', l => l.setup.filterTimeS], ['setpointWeight', l => l.setup.setpointWeight],
  ['hysteresis', l => l.setup.hysteresis], ['upstream', l => l.setup.upstream.join(' ')], ['gainUnit', () => 'gain'], ['timeUnit', () => 's'],
]

/** A loop list as CSV, with the columns that the import of loop lists takes; times in seconds, gain without unit. */
export function loopListText(loops: ListedLoop[]): string {
  const cell = (x: string | number | null) => x === null ? '' : /[",\n]/.test(String(x)) ? `"${String(x).replaceAll('"', '""')}"` : String(x)
  return [COLUMNS.map(([name]) => name).join(','), ...loops.map(l => COLUMNS.map(([, of]) => cell(of(l))).join(','))].join('\n') + '\n'
}
