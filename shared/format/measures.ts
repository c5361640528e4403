import type { MeasureKey, Measures } from '../assessment/types'
import { formatDuration } from './duration'
import { formatNumber } from './number'

type Kind = 'share' | 'number' | 'pv' | 'duration' | 'percent'
export interface MeasureWords { key: MeasureKey, label: string, kind: Kind, unit?: string }
export interface MeasureSection { title: string, measures: MeasureWords[] }

const m = (key: MeasureKey, label: string, kind: Kind, unit?: string): MeasureWords => ({ key, label, kind, unit })

/** The figures of a loop-week in the order in which they are read, with their units. */
export const MEASURE_SECTIONS: readonly MeasureSection[] = [
  { title: 'Data', measures: [m('coverage', 'Coverage', 'share'), m('frozenFraction', 'Frozen', 'share'), m('outOfRangeFraction', 'Out of range', 'share'), m('compressionFactor', 'Compression factor', 'number'), m('quantisation', 'Step of the reading', 'pv')] },
  { title: 'Use', measures: [m('serviceFactor', 'Service factor', 'share'), m('saturationLowFraction', 'At the low limit', 'share'), m('saturationHighFraction', 'At the high limit', 'share'), m('valveTravelPerDay', 'Output travel', 'number', '% a day'), m('reversalsPerDay', 'Reversals', 'number', 'a day'), m('switchingsPerDay', 'Switchings', 'number', 'a day')] },
  { title: 'Error', measures: [m('iaePerHour', 'IAE per hour', 'pv'), m('iaePercentSpan', 'the same, of span', 'number', '%'), m('offset', 'Offset', 'pv'), m('standardDeviation', 'Standard deviation of PV', 'pv'), m('timeInTolerance', 'Time in tolerance', 'share')] },
  { title: 'Oscillation', measures: [m('oscillationIndex', 'Regularity', 'number'), m('oscillationPeriod', 'Period', 'duration'), m('oscillationAmplitude', 'Amplitude', 'pv'), m('oscillationStrength', 'Share of the variance', 'share'), m('oscillationShare', 'Share of the week', 'share'), m('onOffPeriodS', 'On-off period', 'duration'), m('onOffSwing', 'On-off swing', 'pv'), m('onOffDuty', 'On-off duty', 'share')] },
  { title: 'Benchmark', measures: [m('varianceRatio', 'Variance ratio', 'number'), m('varianceRatioLow', '95 % interval from', 'number'), m('varianceRatioHigh', 'to', 'number'), m('headroom', 'Headroom', 'share'), m('idleIndex', 'Idle index', 'number'), m('areaIndex', 'Area index', 'number')] },
  { title: 'Set-point responses', measures: [m('setpointMoves', 'Steps found', 'number'), m('overshoot', 'Overshoot', 'share'), m('riseTimeS', 'Rise time', 'duration'), m('settlingTimeS', 'Settling time', 'duration'), m('decayRatio', 'Decay ratio', 'number')] },
  { title: 'Valve', measures: [m('apparentStiction', 'Apparent stiction', 'number', '% of OP'), m('apparentStictionLow', '95 % interval from', 'number', '% of OP'), m('apparentStictionHigh', 'to', 'number', '% of OP')] },
]
export const MEASURE_LABELS = new Map(MEASURE_SECTIONS.flatMap(s => s.measures).map(w => [w.key, w]))

/** A figure with its unit, as it stands on a page. */
export function formatMeasure(words: MeasureWords, measures: Measures, pvUnit: string): string {
  const value = measures[words.key]
  if (value === null || value === undefined) return ''
  switch (words.kind) {
    case 'share': return `${formatNumber(value * 100)} %`
    case 'duration': return formatDuration(value)
    case 'pv': return `${formatNumber(value)}${pvUnit ? ` ${pvUnit}` : ''}`
    default: return `${formatNumber(value)}${words.unit ? ` ${words.unit}` : ''}`
  }
}
