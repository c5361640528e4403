import type { Knex } from 'knex'

/** Outgoing mail: `key` is unique, so that one mail per occasion goes out whatever crashes. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table mails (
      id bigint generated always as identity primary key,
      key text not null unique,
      kind text not null,
      user_id bigint references users on delete set null,
      recipient text not null,
      subject text not null,
      text text not null,
      html text,
      headers jsonb not null default '{}',
      status text not null default 'waiting' check (status in ('waiting', 'sending', 'sent', 'failed')),
      attempts integer not null default 0,
      next_attempt_at timestamptz not null default now(),
      error text,
      created_at timestamptz not null default now(),
      sent_at timestamptz
    );
    create index mails_due on mails (status, next_attempt_at);

    -- the built-in catcher: what arrived where no SMTP_URL is set
    create table caught_mails (
      id bigint generated always as identity primary key,
      mail_from text not null,
      rcpt_to text[] not null,
      subject text not null default '',
      raw bytea not null,
      received_at timestamptz not null default now()
    );

    create table digest_subscriptions (
      user_id bigint primary key references users on delete cascade,
      active boolean not null default true,
      area_ids bigint[] not null default '{}',
      unsubscribe_token text not null unique,
      updated_at timestamptz not null default now()
    );

    create table digests (
      id bigint generated always as identity primary key,
      week text not null,
      due_at timestamptz not null,
      made_at timestamptz,
      made_by bigint references users on delete set null,
      recipients integer not null default 0,
      unique (week)
    );
  `)
}
