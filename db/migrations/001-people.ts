import type { Knex } from 'knex'

/** People, their sessions, one-time links, machine tokens, the audit trail. Secrets are stored only as SHA-256. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table users (
      id bigint generated always as identity primary key,
      email text not null,
      name text not null,
      role text not null check (role in ('viewer', 'technician', 'engineer', 'admin')),
      password_hash text,
      demo boolean not null default false,
      disabled_at timestamptz,
      notify jsonb not null default '{"assignment": true, "handBack": true, "overdue": true}',
      created_at timestamptz not null default now()
    );
    create unique index users_email on users (lower(email));

    create table sessions (
      id_hash text primary key,
      user_id bigint not null references users on delete cascade,
      created_at timestamptz not null default now(),
      last_seen_at timestamptz not null default now(),
      expires_at timestamptz not null,
      user_agent text
    );
    create index sessions_user on sessions (user_id);

    create table one_time_links (
      token_hash text primary key,
      user_id bigint not null references users on delete cascade,
      purpose text not null check (purpose in ('invitation', 'passwordReset')),
      expires_at timestamptz not null,
      used_at timestamptz,
      created_at timestamptz not null default now()
    );

    create table api_tokens (
      id bigint generated always as identity primary key,
      name text not null,
      token_hash text not null unique,
      scopes text[] not null,
      created_by bigint references users on delete set null,
      created_at timestamptz not null default now(),
      last_used_at timestamptz,
      revoked_at timestamptz
    );

    create table sign_in_attempts (
      email text not null,
      at timestamptz not null default now()
    );
    create index sign_in_attempts_email on sign_in_attempts (email, at);

    create table audit (
      id bigint generated always as identity primary key,
      at timestamptz not null default now(),
      user_id bigint references users on delete set null,
      actor text not null,
      action text not null,
      entity text not null,
      entity_id text,
      data jsonb not null default '{}'
    );
    create index audit_at on audit (at desc);
    create index audit_entity on audit (entity, entity_id);
  `)
}
