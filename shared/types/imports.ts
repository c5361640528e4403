export type ImportStatus = 'received' | 'needsMapping' | 'reading' | 'assessing' | 'done' | 'failed'

/** What recognition found in a file, and what it asks. */
export interface ImportMapping {
  questions?: ('dateOrder' | 'unknownLoops')[]
  layout?: 'wide' | 'long'
  delimiter?: string
  decimal?: string
  encoding?: string
  compression?: string | null
  timeColumn?: string
  dateOrders?: ('yearFirst' | 'dayFirst' | 'monthFirst')[]
  timeExamples?: string[]
  timezone?: string
  headers?: string[]
  loops?: { tag: string, known: boolean, signals: string[], type: string }[]
  ignoredColumns?: string[]
  skippedLoops?: string[]
}

/** An import as the API answers it. */
export interface ImportItem {
  id: number, name: string, status: ImportStatus, progress: number, secondsLeft: number | null
  rows: number, samples: number, loops: number, rejected: number, missing: Record<string, number>, changed: number, weeks: string[], error: string | null
  receivedAt: string, startedAt: string | null, finishedAt: string | null, bytes: number, sha256: string | null, receivedBy: string | null, toAssess: number, assessed: number
  mapping?: ImportMapping | null
}
