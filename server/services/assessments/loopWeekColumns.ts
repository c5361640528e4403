import { METHOD_VERSION } from '../../../shared/assessment/assessLoopWeek'
import type { LoopWeekAssessment, MeasureKey } from '../../../shared/assessment/types'

const WEIGHT = { 1: 3, 2: 2, 3: 1 } as const
const MEASURES: MeasureKey[] = [
  'coverage', 'serviceFactor', 'saturationFraction', 'iaePerHour', 'iaePercentSpan', 'offset', 'standardDeviation', 'timeInTolerance', 'oscillationIndex', 'oscillationPeriod',
  'oscillationAmplitude', 'oscillationStrength', 'varianceRatio', 'varianceRatioLow', 'varianceRatioHigh', 'headroom', 'valveTravelPerDay', 'reversalsPerDay', 'compressionFactor',
]
const snake = (name: string) => name.replace(/[A-Z]/g, letter => `_${letter.toLowerCase()}`)

/** The columns of `loop_weeks` that an assessment fills; figures that the fleet table sorts by. */
export function loopWeekColumns(a: LoopWeekAssessment, { priority, version, weekStartMs }: { priority: 1 | 2 | 3, version: number, weekStartMs: number }): Record<string, unknown> {
  const finite = (value: number | null) => value !== null && Number.isFinite(value) ? value : null
  return {
    week_start: new Date(weekStartMs).toISOString(), method_version: a.methodVersion || METHOD_VERSION, loop_version: version,
    ribbon: a.ribbon, hours: JSON.stringify(a.hours), lost_hours: a.lostHours, weighted_lost_hours: a.lostHours * WEIGHT[priority],
    // how sure one is that one cannot tell is no figure
    verdict: a.verdict, confidence: a.verdict === 'cannotTell' ? null : finite(a.confidence),
    ...Object.fromEntries(MEASURES.map(key => [snake(key), finite(a.measures[key])])),
  }
}
