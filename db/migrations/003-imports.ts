import type { Knex } from 'knex'

/** Uploads: what was acknowledged, how far it is, what was rejected. The file itself lies in DATA_DIR/uploads. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table imports (
      id bigint generated always as identity primary key,
      name text not null,
      status text not null default 'received' check (status in ('received', 'needsMapping', 'reading', 'assessing', 'done', 'failed')),
      file_key text,
      bytes bigint not null default 0,
      sha256 text,
      idempotency_key text,
      options jsonb not null default '{}',
      -- what recognition found, offered in the mapping step
      mapping jsonb,
      progress double precision not null default 0,
      seconds_left double precision,
      rows bigint not null default 0,
      samples bigint not null default 0,
      loops integer not null default 0,
      rejected bigint not null default 0,
      missing jsonb not null default '{}',
      changed bigint not null default 0,
      weeks text[] not null default '{}',
      to_assess integer not null default 0,
      assessed integer not null default 0,
      error text,
      user_id bigint references users on delete set null,
      token_id bigint references api_tokens on delete set null,
      received_at timestamptz not null default now(),
      started_at timestamptz,
      finished_at timestamptz
    );
    create unique index imports_idempotency on imports (idempotency_key) where idempotency_key is not null;
    create index imports_received on imports (received_at desc);

    create table import_rejects (
      import_id bigint not null references imports on delete cascade,
      line bigint not null,
      column_name text not null,
      cell text not null,
      reason text not null
    );
    create index import_rejects_import on import_rejects (import_id, line);

    -- resumable uploads (tus 1.0)
    create table uploads (
      id text primary key,
      user_id bigint not null references users on delete cascade,
      length bigint not null,
      received bigint not null default 0,
      metadata jsonb not null default '{}',
      import_id bigint references imports on delete set null,
      created_at timestamptz not null default now()
    );
  `)
}
