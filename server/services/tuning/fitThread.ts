import type { Piscina } from 'piscina'
import type { FitTask } from '../../threads/fitModel'
import { threadPool } from '../../worker/threadPool'
import type { ModelAnswer } from '../../../shared/types/tuning'
import { Refusal } from '../refusal'

/**
 * One thread of the web process fits models on demand. Not the worker: somebody waits for this answer, it belongs to
 * nobody else, and behind an import the worker may be busy for minutes. One thread, a short queue and an end to every
 * fit keep the web process answering; its own loop never computes.
 */
const WAITING = 3
const LONGEST_MS = 90_000
let pool: Piscina | undefined
let running = 0

export async function fitInThread(task: FitTask): Promise<ModelAnswer> {
  if (running > WAITING) throw new Refusal(503, 'busy', 'Other models are being fitted; try again in a moment.', { retryAfter: 15 })
  pool ??= threadPool('fitModel', 1)
  const stop = new AbortController()
  const end = setTimeout(() => stop.abort(), LONGEST_MS)
  running++
  try { return await pool.run(task, { signal: stop.signal }) as ModelAnswer }
  catch (error) {
    if (stop.signal.aborted) throw new Refusal(422, 'too_much', 'The fit took too long; choose fewer weeks or fewer stretches.')
    throw error
  }
  finally {
    clearTimeout(end)
    running--
  }
}
