import type { Knex } from 'knex'

/** The site: settings, areas, loops with their set-up, outages, shelvings, saved views. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table settings (
      key text primary key,
      value jsonb not null,
      updated_at timestamptz not null default now()
    );

    create table areas (
      id bigint generated always as identity primary key,
      name text not null unique,
      position integer not null default 0
    );

    create table loops (
      id bigint generated always as identity primary key,
      tag text not null unique,
      description text not null default '',
      area_id bigint references areas on delete set null,
      unit text not null default '',
      type text not null default 'other' check (type in ('flow', 'pressure', 'level', 'temperature', 'analysis', 'other')),
      pv_low double precision, pv_high double precision, pv_unit text not null default '',
      op_low double precision not null default 0, op_high double precision not null default 100,
      normal_modes text[] not null default '{AUTO,CAS}',
      tolerance double precision,
      priority smallint not null default 2 check (priority in (1, 2, 3)),
      dead_time_s double precision, interval_s double precision, settling_s double precision,
      form text not null default 'ideal' check (form in ('ideal', 'series', 'parallel', 'onOff')),
      action text not null default 'reverse' check (action in ('direct', 'reverse')),
      gain double precision, gain_unit text not null default 'gain' check (gain_unit in ('gain', 'proportionalBand')),
      integral_time double precision, derivative_time double precision,
      time_unit text not null default 's' check (time_unit in ('s', 'min', 'repeatsPerMin')),
      filter_time_s double precision, setpoint_weight double precision, hysteresis double precision,
      upstream text[] not null default '{}',
      -- ranges guessed from the data until a loop list says them
      range_guessed boolean not null default false,
      version integer not null default 1,
      created_at timestamptz not null default now(),
      updated_at timestamptz not null default now()
    );
    create index loops_area on loops (area_id);

    create table outages (
      id bigint generated always as identity primary key,
      area_id bigint references areas on delete cascade,
      from_at timestamptz not null,
      to_at timestamptz not null check (to_at > from_at),
      reason text not null default '',
      created_by bigint references users on delete set null,
      created_at timestamptz not null default now()
    );
    create index outages_span on outages (from_at, to_at);

    create table shelvings (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      until_at timestamptz not null,
      reason text not null,
      created_by bigint references users on delete set null,
      created_at timestamptz not null default now(),
      ended_at timestamptz
    );

    create table set_asides (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      verdict text not null,
      week text not null,
      reason text not null,
      until_at timestamptz not null,
      created_by bigint references users on delete set null,
      created_at timestamptz not null default now(),
      ended_at timestamptz
    );

    create table saved_views (
      id bigint generated always as identity primary key,
      user_id bigint not null references users on delete cascade,
      name text not null,
      query text not null,
      shared boolean not null default false,
      created_at timestamptz not null default now(),
      unique (user_id, name)
    );

    create table concerns (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      text text not null,
      user_id bigint references users on delete set null,
      created_at timestamptz not null default now()
    );
  `)
}
