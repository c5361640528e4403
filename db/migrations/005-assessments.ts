import type { Knex } from 'knex'

/** A loop-week: figures as columns for sorting, the rest as one document; groups of loops that oscillate together. */
export async function up(db: Knex): Promise<void> {
  await db.raw(`
    create table loop_weeks (
      loop_id bigint not null references loops on delete cascade,
      week text not null,
      week_start timestamptz not null,
      method_version text not null,
      loop_version integer not null,
      assessed_at timestamptz not null default now(),
      ribbon text not null,
      hours jsonb not null,
      lost_hours integer not null,
      weighted_lost_hours integer not null,
      verdict text not null,
      confidence double precision,
      coverage double precision, service_factor double precision, saturation_fraction double precision,
      iae_per_hour double precision, iae_percent_span double precision, "offset" double precision, standard_deviation double precision,
      time_in_tolerance double precision,
      oscillation_index double precision, oscillation_period double precision, oscillation_amplitude double precision, oscillation_strength double precision,
      variance_ratio double precision, variance_ratio_low double precision, variance_ratio_high double precision, headroom double precision,
      valve_travel_per_day double precision, reversals_per_day double precision, compression_factor double precision,
      -- the whole LoopWeekAssessment
      detail jsonb not null,
      change_mark text,
      change_since text,
      primary key (loop_id, week)
    );
    create index loop_weeks_week on loop_weeks (week, weighted_lost_hours desc);
    alter table loop_weeks alter column detail set compression lz4;

    -- which version of the method and of the set-up made each figure, kept when a week is assessed again
    create table loop_week_history (
      id bigint generated always as identity primary key,
      loop_id bigint not null references loops on delete cascade,
      week text not null,
      method_version text not null,
      loop_version integer not null,
      assessed_at timestamptz not null,
      lost_hours integer not null,
      verdict text not null,
      confidence double precision,
      cause text not null
    );
    create index loop_week_history_loop on loop_week_history (loop_id, week);

    create table loop_groups (
      id bigint generated always as identity primary key,
      week text not null,
      letter text not null,
      period_s double precision not null,
      likely_source bigint references loops on delete cascade,
      evidence jsonb not null default '[]',
      created_at timestamptz not null default now(),
      unique (week, letter)
    );
    create table loop_group_members (
      group_id bigint not null references loop_groups on delete cascade,
      loop_id bigint not null references loops on delete cascade,
      strength double precision not null,
      lag_s double precision,
      rank integer not null,
      score double precision not null default 0,
      reasons jsonb not null default '[]',
      primary key (group_id, loop_id)
    );
    create index loop_group_members_loop on loop_group_members (loop_id);
  `)
}
