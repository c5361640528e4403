import { formatChange, formatConfidence, formatCount, formatFull, formatNumber, formatPercent } from '../shared/format/number'
import { formatDuration } from '../shared/format/duration'
import { TYPE_WORDS, verdictWords } from '../shared/format/words'
import { STATE_WORDS } from '../shared/types/tickets'
import type { LoopRow } from '../shared/types/fleet'
import { STATES } from '../shared/ribbon/states'

/** A column of the fleet table. `text` is what stands in the cell, `full` what the tooltip says. */
export interface FleetColumn {
  key: string
  head: string
  /** stands after the name in the header; PV: the loop's own unit */
  unit?: string
  /** what it means, for the header's tooltip and the chooser */
  about: string
  width: number
  kind: 'number' | 'words' | 'ribbon' | 'interval' | 'ticket'
  text: (row: LoopRow) => string
  full?: (row: LoopRow) => string
}

type NumberKey = { [K in keyof LoopRow]: LoopRow[K] extends number | null ? K : never }[keyof LoopRow]

const number = (key: NumberKey, head: string, unit: string, about: string, format: (value: number | null) => string = formatNumber, width = 92): FleetColumn => ({
  key, head, unit, about, width, kind: 'number',
  text: row => format(row[key]),
  full: row => (row[key] === null ? 'cannot be told from this record' : `${formatFull(row[key])}${unit === 'PV' ? ` ${row.pvUnit}` : ''}`),
})
const percent = (key: NumberKey, head: string, about: string, width = 92): FleetColumn => ({
  ...number(key, head, '%', about, formatPercent, width), full: row => (row[key] === null ? 'cannot be told from this record' : `${formatFull(row[key]! * 100)} %`),
})
const words = (key: keyof LoopRow, head: string, about: string, width: number, text: (row: LoopRow) => string = row => String(row[key] ?? '')): FleetColumn => ({ key, head, about, width, kind: 'words', text })

export const FLEET_COLUMNS: readonly FleetColumn[] = [
  { key: 'ribbon', head: 'Week', about: 'One cell for each hour of the week', width: 216, kind: 'ribbon', text: () => '' },
  number('lostHours', 'Lost', 'h', 'Hours in manual, at a limit, hunting, off target or with a doubtful sensor', formatCount, 60),
  number('weightedLostHours', 'Weighted', 'h', 'Lost hours times 3, 2 or 1 by the priority of the loop', formatCount, 94),
  number('change', 'Change', 'h', 'Weighted lost hours against the week before', formatChange, 80),
  { key: 'verdict', head: 'Verdict', about: 'The likely cause and how sure it is', width: 232, kind: 'words', text: row => verdictWords(row.verdict, row.form), full: row => row.reason ?? (row.confidence === null ? '' : `${formatConfidence(row.confidence)} sure`) },
  { ...number('oscillationPeriod', 'Period', '', 'Period of the strongest oscillation', formatDuration, 70), full: row => (row.oscillationPeriod === null ? 'no oscillation found' : `${formatFull(row.oscillationPeriod)} s`) },
  percent('saturationFraction', 'At limit', 'Share of the time with the output at a limit', 82),
  { key: 'varianceRatio', head: 'Variance ratio', about: 'Minimum variance / variance with its 95 % interval: 1 cannot be controlled better', width: 112, kind: 'interval', text: row => formatNumber(row.varianceRatio), full: row => (row.varianceRatio === null ? 'cannot be told from this record' : `${formatNumber(row.varianceRatio)}, 95 % interval ${formatNumber(row.varianceRatioLow)} to ${formatNumber(row.varianceRatioHigh)}`) },
  { key: 'openTicket', head: 'Ticket', about: 'Its newest ticket that is not closed', width: 100, kind: 'ticket', text: row => (row.openTicket === null ? '' : `T-${row.openTicket} ${row.openTicketState ? STATE_WORDS[row.openTicketState] : ''}`) },
  words('group', 'Group', 'The group of loops that it hunts with', 76),
  words('area', 'Area', 'Area of the plant', 140),
  words('unit', 'Unit', 'Unit of the plant', 140),
  words('type', 'Type', 'What is measured', 104, row => TYPE_WORDS[row.type]),
  number('priority', 'Priority', '', 'Weight of its lost hours: 1 counts three times, 2 twice, 3 once', formatCount, 84),
  ...STATES.map((s): FleetColumn => ({
    key: `hours.${s.state}`, head: s.label[0].toUpperCase() + s.label.slice(1), unit: 'h', about: s.meaning, width: s.label.length > 10 ? 136 : 96, kind: 'number', text: row => formatCount(row.hours[s.state]),
  })),
  percent('serviceFactor', 'Service factor', 'Time in a normal mode / time with a known mode', 128),
  percent('timeInTolerance', 'In tolerance', 'Share of time with the error within the tolerance', 116),
  number('iaePerHour', 'IAE per hour', 'PV', 'Time-weighted mean absolute error', formatNumber, 128),
  number('iaePercentSpan', 'IAE', '% span', 'Time-weighted mean absolute error in % of span', formatNumber, 104),
  number('offset', 'Offset', 'PV', 'Mean of SP - PV', formatNumber, 96),
  number('standardDeviation', 'Deviation', 'PV', 'Standard deviation of PV', formatNumber, 112),
  number('oscillationIndex', 'Oscillation index', '', 'Regularity of the strongest oscillation; above 1: oscillating', formatNumber, 136),
  number('oscillationAmplitude', 'Amplitude', 'PV', 'Half the peak-to-peak swing of the oscillation', formatNumber, 116),
  percent('oscillationStrength', 'Strength', 'Share of the error variance that the oscillation carries', 100),
  percent('headroom', 'Headroom', '1 - variance ratio: the share of variance that control could remove', 112),
  number('valveTravelPerDay', 'Valve travel', '%/d', 'Sum of the changes of OP in % of span per day', formatNumber, 124),
  number('reversalsPerDay', 'Reversals', '/d', 'Reversals of OP beyond the noise band per day', formatCount, 112),
  number('compressionFactor', 'Compression', '', 'Compression factor of the record', formatNumber, 112),
  percent('coverage', 'Coverage', 'Time with usable samples / length of the week', 104),
]

export const USUAL_COLUMNS: readonly string[] = ['ribbon', 'lostHours', 'weightedLostHours', 'change', 'verdict', 'oscillationPeriod', 'varianceRatio', 'openTicket']

/** The columns of these keys in this order; keys that are none are left out. */
export function columnsOf(keys: readonly string[]): FleetColumn[] {
  return keys.flatMap(key => FLEET_COLUMNS.find(column => column.key === key) ?? [])
}
