import type { DisplayedController } from '../control/types'
import { formatNumber } from '../format/number'

/** A controller in words, as the control system shows it: for headings and sheets. */
export function settingsText(c: DisplayedController): string {
  const time = c.timeUnit === 's' ? 's' : 'min'
  const parts = [
    `${c.form} form, ${c.action} action`,
    c.gainUnit === 'proportionalBand' ? `proportional band ${formatNumber(c.gain)} %` : `gain ${formatNumber(c.gain)}`,
    !c.integral ? 'integral action off' : c.form === 'parallel' ? `integral gain ${formatNumber(c.integral)} per ${time}` : c.timeUnit === 'repeatsPerMin' ? `integral ${formatNumber(c.integral)} repeats/min` : `integral time ${formatNumber(c.integral)} ${time}`,
    c.derivative ? (c.form === 'parallel' ? `derivative gain ${formatNumber(c.derivative)} ${time}` : `derivative time ${formatNumber(c.derivative)} ${time}`) : 'no derivative action',
  ]
  if (c.setpointWeight !== undefined && c.setpointWeight !== 1) parts.push(`set-point weight ${formatNumber(c.setpointWeight, 2)}`)
  if (c.measurementFilterTime) parts.push(`filter on PV ${formatNumber(c.measurementFilterTime)} s`)
  if (c.derivative && c.derivativeFilterFactor !== undefined && c.derivativeFilterFactor !== 10) parts.push(`derivative filter N ${formatNumber(c.derivativeFilterFactor)}`)
  return parts.join(', ')
}
