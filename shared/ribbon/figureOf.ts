import type { LedgerState } from '../assessment/types'
import { formatDuration } from '../format/duration'
import { formatNumber, formatPercent } from '../format/number'
import type { LoopRow } from '../types/fleet'

type Figures = Pick<LoopRow, 'pvUnit' | 'oscillationPeriod' | 'oscillationAmplitude' | 'saturationFraction' | 'serviceFactor' | 'coverage' | 'iaePerHour' | 'timeInTolerance'>

/** The figure of the week that stands behind a state, as a short phrase; null where there is none. */
export function figureOf(row: Figures, state: LedgerState): string | null {
  const unit = row.pvUnit ? ` ${row.pvUnit}` : ''
  switch (state) {
    case 'hunting': return row.oscillationPeriod === null ? null : `period ${formatDuration(row.oscillationPeriod)}${row.oscillationAmplitude === null ? '' : `, amplitude ${formatNumber(row.oscillationAmplitude)}${unit}`}`
    case 'offTarget': return row.iaePerHour === null ? null : `mean absolute error of the week ${formatNumber(row.iaePerHour)}${unit}`
    case 'saturated': return row.saturationFraction === null ? null : `at a limit for ${formatPercent(row.saturationFraction)} % of the week`
    case 'manual': return row.serviceFactor === null ? null : `service factor ${formatPercent(row.serviceFactor)} %`
    case 'sensor': case 'noData': return row.coverage === null ? null : `usable samples for ${formatPercent(row.coverage)} % of the week`
    case 'steady': return row.timeInTolerance === null ? null : `in tolerance for ${formatPercent(row.timeInTolerance)} % of the week`
    default: return null
  }
}
