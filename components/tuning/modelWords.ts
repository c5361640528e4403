import { formatDuration } from '#shared/format/duration'
import { formatNumber } from '#shared/format/number'
import type { ProcessModel } from '#shared/control/types'
import type { FitView, ParameterName, StretchKind } from '#shared/types/tuning'

export const KIND_WORDS: Record<ProcessModel['kind'], string> = { fopdt: 'first order with dead time', sopdt: 'second order with dead time', integrating: 'integrating with dead time' }
export const STRETCH_WORDS: Record<StretchKind, string> = { setpointMove: 'set point moved', manualMove: 'OP moved in manual', natural: 'normal operation' }
export const PARAMETER_WORDS: Record<ParameterName, string> = { processGain: 'Gain', timeConstant: 'Lag', timeConstant2: 'Second lag', deadTime: 'Dead time' }

/** Gain in % per % and, in brackets, in the loop's own units. */
export function gainWords(gain: number, kind: ProcessModel['kind'], span: { pv: number, op: number }, pvUnit: string): string {
  const per = kind === 'integrating' ? '/s' : ''
  return `${formatNumber(gain)} % per %${per} (${formatNumber(gain * span.pv / span.op)} ${pvUnit || 'PV unit'} per OP unit${per})`
}
export function parameterText(fit: FitView, name: ParameterName): string {
  const p = fit.parameters[name]
  if (!p) return '–'
  const write = name === 'processGain' ? (v: number) => formatNumber(v) : (v: number) => formatDuration(v)
  // an interval over more than two decades says only that the data do not know it
  if ((p.low > 0) !== (p.high > 0) || Math.abs(p.high) > 100 * Math.abs(p.low) || Math.abs(p.low) > 100 * Math.abs(p.high)) return `${write(p.value)} (not told by the data)`
  return `${write(p.value)} (${write(p.low)} to ${write(p.high)})`
}
