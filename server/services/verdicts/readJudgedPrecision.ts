import type { Database } from '../../../db/knex'
import { listVerdictPrecision } from '../../../db/repositories/loopPage'
import { VERDICTS, type Verdict } from '../../../shared/assessment/types'

export interface JudgedVerdict { verdict: Verdict, given: number, setAside: number, confirmed: number, denied: number, precision: number | null, low: number | null, high: number | null }

/** How often people agreed with each verdict: tickets closed with the outcome it names, against set aside or closed as no problem. */
export async function readJudgedPrecision(db: Database): Promise<JudgedVerdict[]> {
  const rows = await listVerdictPrecision(db)
  return VERDICTS.map((verdict) => {
    const found = rows.find((r: { verdict: string }) => r.verdict === verdict)
    const { given = 0, setAside = 0, confirmed = 0, denied = 0 } = found ?? {}
    const judged = confirmed + denied + setAside
    return { verdict, given, setAside, confirmed, denied, ...wilson(confirmed, judged) }
  }).filter(v => v.given > 0)
}

/** Share with its 95 % interval. Source: Wilson (1927), Probable inference, J. American Statistical Association 22:209-212. */
function wilson(k: number, n: number): { precision: number | null, low: number | null, high: number | null } {
  if (n === 0) return { precision: null, low: null, high: null }
  const z2 = 1.96 ** 2
  const p = k / n
  const middle = (p + z2 / (2 * n)) / (1 + z2 / n)
  const half = 1.96 * Math.sqrt(p * (1 - p) / n + z2 / (4 * n * n)) / (1 + z2 / n)
  return { precision: p, low: Math.max(0, middle - half), high: Math.min(1, middle + half) }
}
