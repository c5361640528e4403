import type { Knex } from 'knex'

/** Loop tickets, from finding to proof. `version` is the lock against two people at once. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table tickets (
      id bigint generated always as identity primary key,
      title text not null,
      state text not null default 'open' check (state in ('open', 'assigned', 'inWork', 'toVerify', 'closed', 'dropped')),
      priority smallint not null default 2 check (priority in (1, 2, 3)),
      due_on date,
      assignee_id bigint references users on delete set null,
      opened_by bigint references users on delete set null,
      group_id bigint references loop_groups on delete set null,
      follow_up_of bigint references tickets on delete set null,
      week text not null,
      evidence jsonb not null default '{}',
      checks jsonb not null default '{}',
      outcome text check (outcome in ('retuned', 'valveRepaired', 'sensorRepaired', 'processChanged', 'workedAround', 'notAProblem')),
      close_reason text,
      proof jsonb,
      proof_final boolean not null default false,
      work_done_at timestamptz,
      closed_at timestamptz,
      closed_by bigint references users on delete set null,
      version integer not null default 1,
      created_at timestamptz not null default now(),
      updated_at timestamptz not null default now()
    );
    create index tickets_state on tickets (state);
    create index tickets_assignee on tickets (assignee_id);

    create table ticket_loops (
      ticket_id bigint not null references tickets on delete cascade,
      loop_id bigint not null references loops on delete cascade,
      position integer not null default 0,
      primary key (ticket_id, loop_id)
    );
    create index ticket_loops_loop on ticket_loops (loop_id);

    create table ticket_watchers (
      ticket_id bigint not null references tickets on delete cascade,
      user_id bigint not null references users on delete cascade,
      primary key (ticket_id, user_id)
    );

    -- history and comments in one list; idempotency_key: an entry sent again from a device changes nothing
    create table ticket_events (
      id bigint generated always as identity primary key,
      ticket_id bigint not null references tickets on delete cascade,
      at timestamptz not null default now(),
      user_id bigint references users on delete set null,
      actor text not null,
      kind text not null,
      text text,
      data jsonb not null default '{}',
      idempotency_key text
    );
    create index ticket_events_ticket on ticket_events (ticket_id, at);
    create unique index ticket_events_idempotency on ticket_events (idempotency_key) where idempotency_key is not null;

    create table ticket_files (
      id bigint generated always as identity primary key,
      ticket_id bigint not null references tickets on delete cascade,
      file_key text not null,
      name text not null,
      media_type text not null,
      bytes bigint not null,
      user_id bigint references users on delete set null,
      created_at timestamptz not null default now(),
      idempotency_key text
    );
    create unique index ticket_files_idempotency on ticket_files (idempotency_key) where idempotency_key is not null;
  `)
}
