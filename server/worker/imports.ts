import { availableParallelism } from 'node:os'
import { resolve } from 'node:path'
import type { Knex } from 'knex'
import type { ImportRow } from '../../db/repositories/imports'
import type { Environment } from '../services/environment'
import { assessDue } from '../services/assessments/assessDue'
import { hasUpload, readNextImports } from '../services/imports/readNextImports'
import { tidyUploads } from '../services/imports/tidyUploads'
import type { AssessAnswer, AssessTask } from '../threads/assess'
import { startBells } from './bells'
import { every } from './every'
import { threadPool } from './threadPool'

/** What a killed worker or a missed bell left lies at most so long. */
const SWEEP_MS = 5000
const HOUR_MS = 3_600_000
/** A worker that was just started has better to do than to rehearse; later it mostly waits. */
const QUIET_AFTER_MS = 10_000
/** A file of this size keeps its reader busy for about as long as the threads need to get ready. */
const WORTH_REHEARSING = 32 << 20

/** Reads uploads and assesses loop-weeks for as long as the worker lives. Answers how to stop it. */
export async function startImports(db: Knex, environment: Environment): Promise<() => Promise<void>> {
  const threads = environment.WORKER_THREADS ?? availableParallelism()
  const dataDir = resolve(environment.DATA_DIR)
  const readers = threadPool('readImport', 1, 1)
  const assessors = threadPool('assess', threads, threads)
  // Away from the web server, an upload that is not here is not lost, and the files here are another site's.
  const elsewhere = environment.EXTRA_WORKER === 'on'
  let stopping = false
  const stopped = () => stopping
  let ready = false
  const getReady = (rounds: number) => {
    if (ready) return
    ready = true
    for (let i = 0; i < threads; i++) assessors.run(rounds, { name: 'getReady' }).catch(() => {})
  }
  const idle = setTimeout(() => getReady(5), QUIET_AFTER_MS)
  const read = async ({ id, bytes }: ImportRow) => {
    // for what comes after the reading, which keeps only one core busy
    if (bytes >= WORTH_REHEARSING) getReady(2)
    await readers.run({ databaseUrl: environment.DATABASE_URL, importId: id, dataDir })
  }
  const assess = (task: AssessTask) => {
    // the play has begun
    ready = true
    return assessors.run(task) as Promise<AssessAnswer>
  }

  const reading = again(() => readNextImports(db, environment.DATABASE_URL, read, stopped, elsewhere ? row => hasUpload(dataDir, row) : undefined), stopped, 'Reading')
  const assessing = again(() => assessDue(db, assess, { lanes: 2, batch: threads * 4, stopped }), stopped, 'Assessment')
  const stopSweep = every(SWEEP_MS, 'Sweep', async () => {
    reading.ring()
    assessing.ring()
  })
  const stopTidy = elsewhere ? async () => {} : every(HOUR_MS, 'Uploads', () => tidyUploads(db, dataDir, new Date()))
  const stopBells = await startBells(environment.DATABASE_URL, job => (job === 'read-imports' ? reading : assessing).ring())
  return async () => {
    stopping = true
    clearTimeout(idle)
    await Promise.all([stopSweep(), stopTidy(), stopBells()])
    // a long reading is cut off: its transaction rolls back and it is read again at the next start
    await readers.destroy()
    await Promise.race([assessing.done(), new Promise(r => setTimeout(r, 5000))])
    await assessors.destroy()
  }
}

/** Runs work when rung, never twice at a time; rung while it runs, it runs once more. */
function again(work: () => Promise<void>, stopped: () => boolean, name: string) {
  let running: Promise<void> | null = null
  let rung = false
  const ring = () => {
    if (stopped()) return
    if (running) {
      rung = true
      return
    }
    rung = false
    running = work().catch((error: Error) => { if (!stopped()) console.error(`${name}:`, error.message) }).finally(() => {
      running = null
      if (rung) ring()
    })
  }
  return { ring, done: async () => { await running } }
}
