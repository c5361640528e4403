import type { Knex } from 'knex'

/** Tuning record of a loop, in the controller's own form and units, and the change sheets of the tuning desk. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table tuning_records (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      ticket_id bigint references tickets on delete set null,
      at timestamptz not null default now(),
      user_id bigint references users on delete set null,
      actor text not null,
      kind text not null check (kind in ('asFound', 'asLeft', 'imported', 'unrecorded')),
      tuning jsonb not null,
      reason text not null default '',
      change_number text
    );
    create index tuning_records_loop on tuning_records (loop_id, at);

    create table change_sheets (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      ticket_id bigint references tickets on delete set null,
      made_by bigint references users on delete set null,
      made_at timestamptz not null default now(),
      sheet jsonb not null
    );
  `)
}
