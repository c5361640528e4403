export interface Reject { line: number, column: string, cell: string, reason: string }
export interface MissingCounts { empty: number, nan: number, text: number, badQuality: number }

/** Rejects kept with their text; the count goes on beyond them. */
export const REJECTS_KEPT = 10_000

/** What a scan saw besides the samples themselves. Counts are exact. */
export class ScanLog {
  /** data lines, without header and blank lines */
  rows = 0
  /** values taken in: one signal at one time */
  samples = 0
  rejected = 0
  uncertain = 0
  missing: MissingCounts = { empty: 0, nan: 0, text: 0, badQuality: 0 }
  rejects: Reject[] = []

  reject(line: number, column: string, cell: string, reason: string): void {
    this.rejected++
    if (this.rejects.length < REJECTS_KEPT) this.rejects.push({ line, column, cell: cell.slice(0, 200), reason })
  }
}
