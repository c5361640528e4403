import type { RejectRow } from '../../../db/repositories/importRejects'
import { noFormula } from '../csvCell'

const quote = (text: string) => `"${noFormula(text).replaceAll('"', '""')}"`

/** Rejected rows and cells, in the order of the file. */
export function rejectsCsv(rows: RejectRow[]): string {
  return ['line,column,cell,reason', ...rows.map(r => [r.line, quote(r.column), quote(r.cell), quote(r.reason)].join(','))].join('\r\n') + '\r\n'
}
