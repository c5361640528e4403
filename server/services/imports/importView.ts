import type { ImportRow } from '../../../db/repositories/imports'

const iso = (at: Date | null) => at && at.toISOString()

/** An import as the API answers it. `samples` counts values: one signal at one time; `changed` those that were stored and now differ. */
export function importView(i: ImportRow) {
  return {
    id: i.id, name: i.name, status: i.status, progress: i.progress, secondsLeft: i.secondsLeft, rows: i.rows, samples: i.samples, loops: i.loops, rejected: i.rejected, missing: i.missing,
    changed: i.changed, weeks: i.weeks, error: i.error, receivedAt: iso(i.receivedAt), startedAt: iso(i.startedAt), finishedAt: iso(i.finishedAt),
    bytes: i.bytes, sha256: i.sha256, receivedBy: i.receivedBy, toAssess: i.toAssess, assessed: i.assessed, mapping: i.mapping,
  }
}

/** Nothing more happens to it by itself. */
export const isSettled = (i: { status: string }) => i.status === 'done' || i.status === 'failed'
