import type { ImportStatus } from '#shared/types/imports'

export const IMPORT_WORDS: Readonly<Record<ImportStatus, string>> = { received: 'Received', needsMapping: 'Asks something', reading: 'Reading', assessing: 'Assessing', done: 'Done', failed: 'Failed' }
