import type { Knex } from 'knex'

/** Samples as one row per loop and UTC day: no row per sample. The codec is in db/blocks. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table trend_blocks (
      loop_id bigint not null references loops on delete cascade,
      day date not null,
      n integer not null,
      t0 timestamptz not null,
      -- ms; null when the time stamps are irregular and stand in "timestamps"
      interval_ms integer,
      timestamps bytea,
      sp bytea, pv bytea, op bytea, mode bytea,
      mode_names text[] not null default '{}',
      codec smallint not null,
      primary key (loop_id, day)
    );
    alter table trend_blocks alter column timestamps set compression lz4;
    alter table trend_blocks alter column sp set compression lz4;
    alter table trend_blocks alter column pv set compression lz4;
    alter table trend_blocks alter column op set compression lz4;
    alter table trend_blocks alter column mode set compression lz4;
  `)
}
