import type { Knex } from 'knex'

/**
 * Loop-weeks that wait to be assessed, and weeks whose groups and changes have to be looked at afterwards. A worker
 * locks the rows it works on and deletes them with its results: when it is killed they are free again at once.
 */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table assessments_due (
      loop_id bigint not null references loops on delete cascade,
      week text not null,
      cause text not null,
      import_ids bigint[] not null default '{}',
      requested_at timestamptz not null default now(),
      primary key (loop_id, week)
    );
    create index assessments_due_imports on assessments_due using gin (import_ids);

    create table weeks_due (
      week text primary key,
      since timestamptz not null default now()
    );

    alter table imports add column attempts integer not null default 0;
  `)
}
