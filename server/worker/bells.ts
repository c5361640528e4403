import PgBoss from 'pg-boss'
import pg from 'pg'
import { JOBS, type JobName } from '../jobs/queue'

/**
 * Listens for work: pg-boss jobs sent in the transaction of what they belong to, and the notification that comes with
 * them, which is faster than polling. Both come back by themselves when the database was away.
 * @returns how to stop it
 */
export async function startBells(databaseUrl: string, ring: (job: JobName) => void): Promise<() => Promise<void>> {
  const boss = new PgBoss({ connectionString: databaseUrl, max: 3, application_name: 'fettle-queue', maintenanceIntervalSeconds: 10, deleteAfterHours: 1, archiveCompletedAfterSeconds: 600 } as PgBoss.ConstructorOptions)
  // without this handler a restart of the database ends the process
  boss.on('error', error => console.error('Queue:', (error as Error).message))
  await boss.start()
  for (const name of JOBS) {
    // "short": one waiting bell is enough. A job to a queue that does not exist is lost without a word, hence created first.
    await boss.createQueue(name, { name, policy: 'short', expireInSeconds: 40, retryLimit: 3, retentionMinutes: 60 } as PgBoss.Queue)
    // rings and returns at once: the work may take longer than any expiry
    await boss.work(name, { pollingIntervalSeconds: 5 }, async () => { ring(name) })
  }

  let stopped = false
  let client: pg.Client | null = null
  let timer: NodeJS.Timeout | undefined
  const listen = async () => {
    const again = () => {
      client = null
      if (!stopped) timer = setTimeout(listen, 1000)
    }
    const next = new pg.Client({ connectionString: databaseUrl, application_name: 'fettle-listener', keepAlive: true })
    next.on('error', () => { next.end().catch(() => {}) })
    next.on('end', again)
    next.on('notification', () => JOBS.forEach(ring))
    try {
      await next.connect()
      await next.query('listen fettle_work')
      client = next
      // whatever was announced while nobody listened
      JOBS.forEach(ring)
    }
    catch {
      next.removeListener('end', again)
      next.end().catch(() => {})
      again()
    }
  }
  await listen()
  return async () => {
    stopped = true
    clearTimeout(timer)
    await (client as pg.Client | null)?.end().catch(() => {})
    await boss.stop({ graceful: false, close: true, wait: true, timeout: 2000 } as PgBoss.StopOptions)
  }
}
