import { readHealth } from '../../db/repositories/health'
import { version } from '../../package.json'

/** For load balancers and the start command; needs no sign-in and tells no figures of the plant. */
export default defineEventHandler(async (event) => {
  try {
    const health = await readHealth(database())
    const status = health.workers ? 'ok' : 'degraded'
    return { status, database: 'up', worker: health.workers ? 'up' : 'down', queue: { waiting: health.waiting, active: health.active }, version }
  }
  catch {
    setResponseStatus(event, 503)
    setResponseHeader(event, 'Retry-After', 5)
    return { status: 'down', database: 'down', worker: 'unknown', queue: null, version }
  }
})
