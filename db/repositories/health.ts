import type { Database } from '../knex'

/** By this name the server knows the connections of worker processes; they poll, so a living one always has some. */
export const WORKER_NAME = 'fettle-worker'

export async function readHealth(db: Database): Promise<{ workers: boolean, waiting: number, active: number, mailsWaiting: number, mailsFailed: number }> {
  const { rows: [row] } = await db.raw(`
    select exists (select 1 from pg_stat_activity where application_name = ? and datname = current_database()) as workers,
           (select count(*) from mails where status in ('waiting', 'sending')) as "mailsWaiting",
           (select count(*) from mails where status = 'failed') as "mailsFailed",
           to_regclass('pgboss.job') is not null as queue`, [WORKER_NAME])
  const { rows: [jobs] } = row.queue
    ? await db.raw(`select count(*) filter (where state in ('created', 'retry')) as waiting, count(*) filter (where state = 'active') as active from pgboss.job where name not like '\\_\\_%'`)
    : { rows: [{ waiting: 0, active: 0 }] }
  return { workers: row.workers, waiting: jobs.waiting, active: jobs.active, mailsWaiting: row.mailsWaiting, mailsFailed: row.mailsFailed }
}

/** Whether a worker has set up the job queue in this database yet. */
export async function hasJobQueue(db: Database): Promise<boolean> {
  const { rows: [row] } = await db.raw(`select to_regclass('pgboss.queue') is not null as ready`)
  return row.ready
}
