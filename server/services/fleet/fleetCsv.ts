import { LEDGER_STATES } from '../../../shared/assessment/types'
import { FLEET_MEASURES, type LoopRow } from '../../../shared/types/fleet'
import { csvCell } from '../csvCell'

/** Columns of the export in the order of the contract; `hours` becomes one column per state. */
export const CSV_COLUMNS: readonly string[] = [
  'tag', 'description', 'area', 'unit', 'type', 'priority', 'verdict', 'confidence', 'lostHours', 'weightedLostHours', 'change',
  ...LEDGER_STATES.map(state => `hours.${state}`), 'ribbon', ...FLEET_MEASURES, 'group', 'openTicket', 'setAside',
]

function valueOf(row: LoopRow, column: string): unknown {
  if (column.startsWith('hours.')) return row.hours[column.slice(6) as keyof LoopRow['hours']]
  if (column === 'setAside') return row.setAside?.until ?? null
  return row[column as keyof LoopRow]
}

/**
 * Rows as CSV (RFC 4180: CRLF, quotes doubled) with full values, in the columns asked for or all of them.
 * Unknown columns are left out; the tag always comes first.
 */
export function fleetCsv(rows: LoopRow[], columns: string[] = []): string {
  const asked = columns.flatMap(name => (name === 'hours' ? LEDGER_STATES.map(state => `hours.${state}`) : [name])).filter(name => CSV_COLUMNS.includes(name) && name !== 'tag')
  const chosen = columns.length ? ['tag', ...new Set(asked)] : CSV_COLUMNS
  return [chosen.join(','), ...rows.map(row => chosen.map(column => csvCell(valueOf(row, column))).join(','))].map(line => `${line}\r\n`).join('')
}
