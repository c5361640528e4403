CREATE TABLE public.api_tokens (
    id bigint NOT NULL,
    name text NOT NULL,
    token_hash text NOT NULL,
    scopes text[] NOT NULL,
    created_by bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    last_used_at timestamp with time zone,
    revoked_at timestamp with time zone
);

ALTER TABLE public.api_tokens ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.api_tokens_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.areas (
    id bigint NOT NULL,
    name text NOT NULL,
    "position" integer DEFAULT 0 NOT NULL
);

ALTER TABLE public.areas ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.areas_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.assessments_due (
    loop_id bigint NOT NULL,
    week text NOT NULL,
    cause text NOT NULL,
    import_ids bigint[] DEFAULT '{}'::bigint[] NOT NULL,
    requested_at timestamp with time zone DEFAULT now() NOT NULL
);

CREATE TABLE public.audit (
    id bigint NOT NULL,
    at timestamp with time zone DEFAULT now() NOT NULL,
    user_id bigint,
    actor text NOT NULL,
    action text NOT NULL,
    entity text NOT NULL,
    entity_id text,
    data jsonb DEFAULT '{}'::jsonb NOT NULL
);

ALTER TABLE public.audit ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.audit_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.caught_mails (
    id bigint NOT NULL,
    mail_from text NOT NULL,
    rcpt_to text[] NOT NULL,
    subject text DEFAULT ''::text NOT NULL,
    raw bytea NOT NULL,
    received_at timestamp with time zone DEFAULT now() NOT NULL
);

ALTER TABLE public.caught_mails ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.caught_mails_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.change_sheets (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    ticket_id bigint,
    made_by bigint,
    made_at timestamp with time zone DEFAULT now() NOT NULL,
    sheet jsonb NOT NULL
);

ALTER TABLE public.change_sheets ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.change_sheets_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.concerns (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    text text NOT NULL,
    user_id bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL
);

ALTER TABLE public.concerns ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.concerns_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.digest_subscriptions (
    user_id bigint NOT NULL,
    active boolean DEFAULT true NOT NULL,
    area_ids bigint[] DEFAULT '{}'::bigint[] NOT NULL,
    unsubscribe_token text NOT NULL,
    updated_at timestamp with time zone DEFAULT now() NOT NULL
);

CREATE TABLE public.digests (
    id bigint NOT NULL,
    week text NOT NULL,
    due_at timestamp with time zone NOT NULL,
    made_at timestamp with time zone,
    made_by bigint,
    recipients integer DEFAULT 0 NOT NULL
);

ALTER TABLE public.digests ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.digests_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.import_rejects (
    import_id bigint NOT NULL,
    line bigint NOT NULL,
    column_name text NOT NULL,
    cell text NOT NULL,
    reason text NOT NULL
);

CREATE TABLE public.imports (
    id bigint NOT NULL,
    name text NOT NULL,
    status text DEFAULT 'received'::text NOT NULL,
    file_key text,
    bytes bigint DEFAULT 0 NOT NULL,
    sha256 text,
    idempotency_key text,
    options jsonb DEFAULT '{}'::jsonb NOT NULL,
    mapping jsonb,
    progress double precision DEFAULT 0 NOT NULL,
    seconds_left double precision,
    rows bigint DEFAULT 0 NOT NULL,
    samples bigint DEFAULT 0 NOT NULL,
    loops integer DEFAULT 0 NOT NULL,
    rejected bigint DEFAULT 0 NOT NULL,
    missing jsonb DEFAULT '{}'::jsonb NOT NULL,
    changed bigint DEFAULT 0 NOT NULL,
    weeks text[] DEFAULT '{}'::text[] NOT NULL,
    to_assess integer DEFAULT 0 NOT NULL,
    assessed integer DEFAULT 0 NOT NULL,
    error text,
    user_id bigint,
    token_id bigint,
    received_at timestamp with time zone DEFAULT now() NOT NULL,
    started_at timestamp with time zone,
    finished_at timestamp with time zone,
    attempts integer DEFAULT 0 NOT NULL,
    CONSTRAINT imports_status_check CHECK ((status = ANY (ARRAY['received'::text, 'needsMapping'::text, 'reading'::text, 'assessing'::text, 'done'::text, 'failed'::text])))
);

ALTER TABLE public.imports ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.imports_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.loop_group_members (
    group_id bigint NOT NULL,
    loop_id bigint NOT NULL,
    strength double precision NOT NULL,
    lag_s double precision,
    rank integer NOT NULL,
    score double precision DEFAULT 0 NOT NULL,
    reasons jsonb DEFAULT '[]'::jsonb NOT NULL
);

CREATE TABLE public.loop_groups (
    id bigint NOT NULL,
    week text NOT NULL,
    letter text NOT NULL,
    period_s double precision NOT NULL,
    likely_source bigint,
    evidence jsonb DEFAULT '[]'::jsonb NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL
);

ALTER TABLE public.loop_groups ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.loop_groups_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.loop_week_history (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    week text NOT NULL,
    method_version text NOT NULL,
    loop_version integer NOT NULL,
    assessed_at timestamp with time zone NOT NULL,
    lost_hours integer NOT NULL,
    verdict text NOT NULL,
    confidence double precision,
    cause text NOT NULL
);

ALTER TABLE public.loop_week_history ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.loop_week_history_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.loop_weeks (
    loop_id bigint NOT NULL,
    week text NOT NULL,
    week_start timestamp with time zone NOT NULL,
    method_version text NOT NULL,
    loop_version integer NOT NULL,
    assessed_at timestamp with time zone DEFAULT now() NOT NULL,
    ribbon text NOT NULL,
    hours jsonb NOT NULL,
    lost_hours integer NOT NULL,
    weighted_lost_hours integer NOT NULL,
    verdict text NOT NULL,
    confidence double precision,
    coverage double precision,
    service_factor double precision,
    saturation_fraction double precision,
    iae_per_hour double precision,
    iae_percent_span double precision,
    "offset" double precision,
    standard_deviation double precision,
    time_in_tolerance double precision,
    oscillation_index double precision,
    oscillation_period double precision,
    oscillation_amplitude double precision,
    oscillation_strength double precision,
    variance_ratio double precision,
    variance_ratio_low double precision,
    variance_ratio_high double precision,
    headroom double precision,
    valve_travel_per_day double precision,
    reversals_per_day double precision,
    compression_factor double precision,
    detail jsonb NOT NULL,
    change_mark text,
    change_since text
);
ALTER TABLE ONLY public.loop_weeks ALTER COLUMN detail SET COMPRESSION lz4;

CREATE TABLE public.loops (
    id bigint NOT NULL,
    tag text NOT NULL,
    description text DEFAULT ''::text NOT NULL,
    area_id bigint,
    unit text DEFAULT ''::text NOT NULL,
    type text DEFAULT 'other'::text NOT NULL,
    pv_low double precision,
    pv_high double precision,
    pv_unit text DEFAULT ''::text NOT NULL,
    op_low double precision DEFAULT 0 NOT NULL,
    op_high double precision DEFAULT 100 NOT NULL,
    normal_modes text[] DEFAULT '{AUTO,CAS}'::text[] NOT NULL,
    tolerance double precision,
    priority smallint DEFAULT 2 NOT NULL,
    dead_time_s double precision,
    interval_s double precision,
    settling_s double precision,
    form text DEFAULT 'ideal'::text NOT NULL,
    action text DEFAULT 'reverse'::text NOT NULL,
    gain double precision,
    gain_unit text DEFAULT 'gain'::text NOT NULL,
    integral_time double precision,
    derivative_time double precision,
    time_unit text DEFAULT 's'::text NOT NULL,
    filter_time_s double precision,
    setpoint_weight double precision,
    hysteresis double precision,
    upstream text[] DEFAULT '{}'::text[] NOT NULL,
    range_guessed boolean DEFAULT false NOT NULL,
    version integer DEFAULT 1 NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    updated_at timestamp with time zone DEFAULT now() NOT NULL,
    CONSTRAINT loops_action_check CHECK ((action = ANY (ARRAY['direct'::text, 'reverse'::text]))),
    CONSTRAINT loops_form_check CHECK ((form = ANY (ARRAY['ideal'::text, 'series'::text, 'parallel'::text, 'onOff'::text]))),
    CONSTRAINT loops_gain_unit_check CHECK ((gain_unit = ANY (ARRAY['gain'::text, 'proportionalBand'::text]))),
    CONSTRAINT loops_priority_check CHECK ((priority = ANY (ARRAY[1, 2, 3]))),
    CONSTRAINT loops_time_unit_check CHECK ((time_unit = ANY (ARRAY['s'::text, 'min'::text, 'repeatsPerMin'::text]))),
    CONSTRAINT loops_type_check CHECK ((type = ANY (ARRAY['flow'::text, 'pressure'::text, 'level'::text, 'temperature'::text, 'analysis'::text, 'other'::text])))
);

ALTER TABLE public.loops ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.loops_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.mails (
    id bigint NOT NULL,
    key text NOT NULL,
    kind text NOT NULL,
    user_id bigint,
    recipient text NOT NULL,
    subject text NOT NULL,
    text text NOT NULL,
    html text,
    headers jsonb DEFAULT '{}'::jsonb NOT NULL,
    status text DEFAULT 'waiting'::text NOT NULL,
    attempts integer DEFAULT 0 NOT NULL,
    next_attempt_at timestamp with time zone DEFAULT now() NOT NULL,
    error text,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    sent_at timestamp with time zone,
    CONSTRAINT mails_status_check CHECK ((status = ANY (ARRAY['waiting'::text, 'sending'::text, 'sent'::text, 'failed'::text])))
);

ALTER TABLE public.mails ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.mails_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.one_time_links (
    token_hash text NOT NULL,
    user_id bigint NOT NULL,
    purpose text NOT NULL,
    expires_at timestamp with time zone NOT NULL,
    used_at timestamp with time zone,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    CONSTRAINT one_time_links_purpose_check CHECK ((purpose = ANY (ARRAY['invitation'::text, 'passwordReset'::text])))
);

CREATE TABLE public.outages (
    id bigint NOT NULL,
    area_id bigint,
    from_at timestamp with time zone NOT NULL,
    to_at timestamp with time zone NOT NULL,
    reason text DEFAULT ''::text NOT NULL,
    created_by bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    CONSTRAINT outages_check CHECK ((to_at > from_at))
);

ALTER TABLE public.outages ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.outages_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.saved_views (
    id bigint NOT NULL,
    user_id bigint NOT NULL,
    name text NOT NULL,
    query text NOT NULL,
    shared boolean DEFAULT false NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL
);

ALTER TABLE public.saved_views ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.saved_views_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.schema_migrations (
    id integer NOT NULL,
    name character varying(255),
    batch integer,
    migration_time timestamp with time zone
);

CREATE SEQUENCE public.schema_migrations_id_seq
    AS integer
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1;

ALTER SEQUENCE public.schema_migrations_id_seq OWNED BY public.schema_migrations.id;

CREATE TABLE public.schema_migrations_lock (
    index integer NOT NULL,
    is_locked integer
);

CREATE SEQUENCE public.schema_migrations_lock_index_seq
    AS integer
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1;

ALTER SEQUENCE public.schema_migrations_lock_index_seq OWNED BY public.schema_migrations_lock.index;

CREATE TABLE public.sessions (
    id_hash text NOT NULL,
    user_id bigint NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    last_seen_at timestamp with time zone DEFAULT now() NOT NULL,
    expires_at timestamp with time zone NOT NULL,
    user_agent text
);

CREATE TABLE public.set_asides (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    verdict text NOT NULL,
    week text NOT NULL,
    reason text NOT NULL,
    until_at timestamp with time zone NOT NULL,
    created_by bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    ended_at timestamp with time zone
);

ALTER TABLE public.set_asides ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.set_asides_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.settings (
    key text NOT NULL,
    value jsonb NOT NULL,
    updated_at timestamp with time zone DEFAULT now() NOT NULL
);

CREATE TABLE public.shelvings (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    until_at timestamp with time zone NOT NULL,
    reason text NOT NULL,
    created_by bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    ended_at timestamp with time zone
);

ALTER TABLE public.shelvings ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.shelvings_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.sign_in_attempts (
    email text NOT NULL,
    at timestamp with time zone DEFAULT now() NOT NULL
);

CREATE TABLE public.ticket_events (
    id bigint NOT NULL,
    ticket_id bigint NOT NULL,
    at timestamp with time zone DEFAULT now() NOT NULL,
    user_id bigint,
    actor text NOT NULL,
    kind text NOT NULL,
    text text,
    data jsonb DEFAULT '{}'::jsonb NOT NULL,
    idempotency_key text
);

ALTER TABLE public.ticket_events ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.ticket_events_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.ticket_files (
    id bigint NOT NULL,
    ticket_id bigint NOT NULL,
    file_key text NOT NULL,
    name text NOT NULL,
    media_type text NOT NULL,
    bytes bigint NOT NULL,
    user_id bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    idempotency_key text
);

ALTER TABLE public.ticket_files ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.ticket_files_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.ticket_loops (
    ticket_id bigint NOT NULL,
    loop_id bigint NOT NULL,
    "position" integer DEFAULT 0 NOT NULL
);

CREATE TABLE public.ticket_watchers (
    ticket_id bigint NOT NULL,
    user_id bigint NOT NULL
);

CREATE TABLE public.tickets (
    id bigint NOT NULL,
    title text NOT NULL,
    state text DEFAULT 'open'::text NOT NULL,
    priority smallint DEFAULT 2 NOT NULL,
    due_on date,
    assignee_id bigint,
    opened_by bigint,
    group_id bigint,
    follow_up_of bigint,
    week text NOT NULL,
    evidence jsonb DEFAULT '{}'::jsonb NOT NULL,
    checks jsonb DEFAULT '{}'::jsonb NOT NULL,
    outcome text,
    close_reason text,
    proof jsonb,
    proof_final boolean DEFAULT false NOT NULL,
    work_done_at timestamp with time zone,
    closed_at timestamp with time zone,
    closed_by bigint,
    version integer DEFAULT 1 NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    updated_at timestamp with time zone DEFAULT now() NOT NULL,
    proof_final_at timestamp with time zone,
    CONSTRAINT tickets_outcome_check CHECK ((outcome = ANY (ARRAY['retuned'::text, 'valveRepaired'::text, 'sensorRepaired'::text, 'processChanged'::text, 'workedAround'::text, 'notAProblem'::text]))),
    CONSTRAINT tickets_priority_check CHECK ((priority = ANY (ARRAY[1, 2, 3]))),
    CONSTRAINT tickets_state_check CHECK ((state = ANY (ARRAY['open'::text, 'assigned'::text, 'inWork'::text, 'toVerify'::text, 'closed'::text, 'dropped'::text])))
);

ALTER TABLE public.tickets ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.tickets_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.trend_blocks (
    loop_id bigint NOT NULL,
    day date NOT NULL,
    n integer NOT NULL,
    t0 timestamp with time zone NOT NULL,
    interval_ms integer,
    timestamps bytea,
    sp bytea,
    pv bytea,
    op bytea,
    mode bytea,
    mode_names text[] DEFAULT '{}'::text[] NOT NULL,
    codec smallint NOT NULL
);
ALTER TABLE ONLY public.trend_blocks ALTER COLUMN timestamps SET COMPRESSION lz4;
ALTER TABLE ONLY public.trend_blocks ALTER COLUMN sp SET COMPRESSION lz4;
ALTER TABLE ONLY public.trend_blocks ALTER COLUMN pv SET COMPRESSION lz4;
ALTER TABLE ONLY public.trend_blocks ALTER COLUMN op SET COMPRESSION lz4;
ALTER TABLE ONLY public.trend_blocks ALTER COLUMN mode SET COMPRESSION lz4;

CREATE TABLE public.tuning_records (
    id bigint NOT NULL,
    loop_id bigint NOT NULL,
    ticket_id bigint,
    at timestamp with time zone DEFAULT now() NOT NULL,
    user_id bigint,
    actor text NOT NULL,
    kind text NOT NULL,
    tuning jsonb NOT NULL,
    reason text DEFAULT ''::text NOT NULL,
    change_number text,
    CONSTRAINT tuning_records_kind_check CHECK ((kind = ANY (ARRAY['asFound'::text, 'asLeft'::text, 'imported'::text, 'unrecorded'::text])))
);

ALTER TABLE public.tuning_records ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.tuning_records_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.uploads (
    id text NOT NULL,
    user_id bigint NOT NULL,
    length bigint NOT NULL,
    received bigint DEFAULT 0 NOT NULL,
    metadata jsonb DEFAULT '{}'::jsonb NOT NULL,
    import_id bigint,
    created_at timestamp with time zone DEFAULT now() NOT NULL
);

CREATE TABLE public.users (
    id bigint NOT NULL,
    email text NOT NULL,
    name text NOT NULL,
    role text NOT NULL,
    password_hash text,
    demo boolean DEFAULT false NOT NULL,
    disabled_at timestamp with time zone,
    notify jsonb DEFAULT '{"overdue": true, "handBack": true, "assignment": true}'::jsonb NOT NULL,
    created_at timestamp with time zone DEFAULT now() NOT NULL,
    CONSTRAINT users_role_check CHECK ((role = ANY (ARRAY['viewer'::text, 'technician'::text, 'engineer'::text, 'admin'::text])))
);

ALTER TABLE public.users ALTER COLUMN id ADD GENERATED ALWAYS AS IDENTITY (
    SEQUENCE NAME public.users_id_seq
    START WITH 1
    INCREMENT BY 1
    NO MINVALUE
    NO MAXVALUE
    CACHE 1
);

CREATE TABLE public.weeks_due (
    week text NOT NULL,
    since timestamp with time zone DEFAULT now() NOT NULL
);

ALTER TABLE ONLY public.schema_migrations ALTER COLUMN id SET DEFAULT nextval('public.schema_migrations_id_seq'::regclass);

ALTER TABLE ONLY public.schema_migrations_lock ALTER COLUMN index SET DEFAULT nextval('public.schema_migrations_lock_index_seq'::regclass);

ALTER TABLE ONLY public.api_tokens
    ADD CONSTRAINT api_tokens_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.api_tokens
    ADD CONSTRAINT api_tokens_token_hash_key UNIQUE (token_hash);

ALTER TABLE ONLY public.areas
    ADD CONSTRAINT areas_name_key UNIQUE (name);

ALTER TABLE ONLY public.areas
    ADD CONSTRAINT areas_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.assessments_due
    ADD CONSTRAINT assessments_due_pkey PRIMARY KEY (loop_id, week);

ALTER TABLE ONLY public.audit
    ADD CONSTRAINT audit_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.caught_mails
    ADD CONSTRAINT caught_mails_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.change_sheets
    ADD CONSTRAINT change_sheets_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.concerns
    ADD CONSTRAINT concerns_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.digest_subscriptions
    ADD CONSTRAINT digest_subscriptions_pkey PRIMARY KEY (user_id);

ALTER TABLE ONLY public.digest_subscriptions
    ADD CONSTRAINT digest_subscriptions_unsubscribe_token_key UNIQUE (unsubscribe_token);

ALTER TABLE ONLY public.digests
    ADD CONSTRAINT digests_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.digests
    ADD CONSTRAINT digests_week_key UNIQUE (week);

ALTER TABLE ONLY public.imports
    ADD CONSTRAINT imports_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.loop_group_members
    ADD CONSTRAINT loop_group_members_pkey PRIMARY KEY (group_id, loop_id);

ALTER TABLE ONLY public.loop_groups
    ADD CONSTRAINT loop_groups_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.loop_groups
    ADD CONSTRAINT loop_groups_week_letter_key UNIQUE (week, letter);

ALTER TABLE ONLY public.loop_week_history
    ADD CONSTRAINT loop_week_history_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.loop_weeks
    ADD CONSTRAINT loop_weeks_pkey PRIMARY KEY (loop_id, week);

ALTER TABLE ONLY public.loops
    ADD CONSTRAINT loops_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.loops
    ADD CONSTRAINT loops_tag_key UNIQUE (tag);

ALTER TABLE ONLY public.mails
    ADD CONSTRAINT mails_key_key UNIQUE (key);

ALTER TABLE ONLY public.mails
    ADD CONSTRAINT mails_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.one_time_links
    ADD CONSTRAINT one_time_links_pkey PRIMARY KEY (token_hash);

ALTER TABLE ONLY public.outages
    ADD CONSTRAINT outages_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.saved_views
    ADD CONSTRAINT saved_views_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.saved_views
    ADD CONSTRAINT saved_views_user_id_name_key UNIQUE (user_id, name);

ALTER TABLE ONLY public.schema_migrations_lock
    ADD CONSTRAINT schema_migrations_lock_pkey PRIMARY KEY (index);

ALTER TABLE ONLY public.schema_migrations
    ADD CONSTRAINT schema_migrations_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.sessions
    ADD CONSTRAINT sessions_pkey PRIMARY KEY (id_hash);

ALTER TABLE ONLY public.set_asides
    ADD CONSTRAINT set_asides_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.settings
    ADD CONSTRAINT settings_pkey PRIMARY KEY (key);

ALTER TABLE ONLY public.shelvings
    ADD CONSTRAINT shelvings_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.ticket_events
    ADD CONSTRAINT ticket_events_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.ticket_files
    ADD CONSTRAINT ticket_files_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.ticket_loops
    ADD CONSTRAINT ticket_loops_pkey PRIMARY KEY (ticket_id, loop_id);

ALTER TABLE ONLY public.ticket_watchers
    ADD CONSTRAINT ticket_watchers_pkey PRIMARY KEY (ticket_id, user_id);

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.trend_blocks
    ADD CONSTRAINT trend_blocks_pkey PRIMARY KEY (loop_id, day);

ALTER TABLE ONLY public.tuning_records
    ADD CONSTRAINT tuning_records_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.uploads
    ADD CONSTRAINT uploads_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.users
    ADD CONSTRAINT users_pkey PRIMARY KEY (id);

ALTER TABLE ONLY public.weeks_due
    ADD CONSTRAINT weeks_due_pkey PRIMARY KEY (week);

CREATE INDEX assessments_due_imports ON public.assessments_due USING gin (import_ids);

CREATE INDEX audit_at ON public.audit USING btree (at DESC);

CREATE INDEX audit_entity ON public.audit USING btree (entity, entity_id);

CREATE INDEX import_rejects_import ON public.import_rejects USING btree (import_id, line);

CREATE UNIQUE INDEX imports_idempotency ON public.imports USING btree (idempotency_key) WHERE (idempotency_key IS NOT NULL);

CREATE INDEX imports_received ON public.imports USING btree (received_at DESC);

CREATE INDEX loop_group_members_loop ON public.loop_group_members USING btree (loop_id);

CREATE INDEX loop_week_history_loop ON public.loop_week_history USING btree (loop_id, week);

CREATE INDEX loop_weeks_week ON public.loop_weeks USING btree (week, weighted_lost_hours DESC);

CREATE INDEX loops_area ON public.loops USING btree (area_id);

CREATE INDEX mails_due ON public.mails USING btree (status, next_attempt_at);

CREATE INDEX outages_span ON public.outages USING btree (from_at, to_at);

CREATE INDEX sessions_user ON public.sessions USING btree (user_id);

CREATE INDEX sign_in_attempts_email ON public.sign_in_attempts USING btree (email, at);

CREATE UNIQUE INDEX ticket_events_idempotency ON public.ticket_events USING btree (ticket_id, idempotency_key) WHERE (idempotency_key IS NOT NULL);

CREATE INDEX ticket_events_ticket ON public.ticket_events USING btree (ticket_id, at);

CREATE UNIQUE INDEX ticket_files_idempotency ON public.ticket_files USING btree (ticket_id, idempotency_key) WHERE (idempotency_key IS NOT NULL);

CREATE INDEX ticket_loops_loop ON public.ticket_loops USING btree (loop_id);

CREATE INDEX tickets_assignee ON public.tickets USING btree (assignee_id);

CREATE INDEX tickets_follow_up ON public.tickets USING btree (follow_up_of) WHERE (follow_up_of IS NOT NULL);

CREATE INDEX tickets_state ON public.tickets USING btree (state);

CREATE INDEX tuning_records_loop ON public.tuning_records USING btree (loop_id, at);

CREATE UNIQUE INDEX users_email ON public.users USING btree (lower(email));

ALTER TABLE ONLY public.api_tokens
    ADD CONSTRAINT api_tokens_created_by_fkey FOREIGN KEY (created_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.assessments_due
    ADD CONSTRAINT assessments_due_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.audit
    ADD CONSTRAINT audit_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.change_sheets
    ADD CONSTRAINT change_sheets_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.change_sheets
    ADD CONSTRAINT change_sheets_made_by_fkey FOREIGN KEY (made_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.change_sheets
    ADD CONSTRAINT change_sheets_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.concerns
    ADD CONSTRAINT concerns_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.concerns
    ADD CONSTRAINT concerns_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.digest_subscriptions
    ADD CONSTRAINT digest_subscriptions_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.digests
    ADD CONSTRAINT digests_made_by_fkey FOREIGN KEY (made_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.import_rejects
    ADD CONSTRAINT import_rejects_import_id_fkey FOREIGN KEY (import_id) REFERENCES public.imports(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.imports
    ADD CONSTRAINT imports_token_id_fkey FOREIGN KEY (token_id) REFERENCES public.api_tokens(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.imports
    ADD CONSTRAINT imports_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.loop_group_members
    ADD CONSTRAINT loop_group_members_group_id_fkey FOREIGN KEY (group_id) REFERENCES public.loop_groups(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.loop_group_members
    ADD CONSTRAINT loop_group_members_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.loop_groups
    ADD CONSTRAINT loop_groups_likely_source_fkey FOREIGN KEY (likely_source) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.loop_week_history
    ADD CONSTRAINT loop_week_history_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.loop_weeks
    ADD CONSTRAINT loop_weeks_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.loops
    ADD CONSTRAINT loops_area_id_fkey FOREIGN KEY (area_id) REFERENCES public.areas(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.mails
    ADD CONSTRAINT mails_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.one_time_links
    ADD CONSTRAINT one_time_links_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.outages
    ADD CONSTRAINT outages_area_id_fkey FOREIGN KEY (area_id) REFERENCES public.areas(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.outages
    ADD CONSTRAINT outages_created_by_fkey FOREIGN KEY (created_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.saved_views
    ADD CONSTRAINT saved_views_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.sessions
    ADD CONSTRAINT sessions_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.set_asides
    ADD CONSTRAINT set_asides_created_by_fkey FOREIGN KEY (created_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.set_asides
    ADD CONSTRAINT set_asides_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.shelvings
    ADD CONSTRAINT shelvings_created_by_fkey FOREIGN KEY (created_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.shelvings
    ADD CONSTRAINT shelvings_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_events
    ADD CONSTRAINT ticket_events_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_events
    ADD CONSTRAINT ticket_events_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.ticket_files
    ADD CONSTRAINT ticket_files_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_files
    ADD CONSTRAINT ticket_files_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.ticket_loops
    ADD CONSTRAINT ticket_loops_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_loops
    ADD CONSTRAINT ticket_loops_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_watchers
    ADD CONSTRAINT ticket_watchers_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.ticket_watchers
    ADD CONSTRAINT ticket_watchers_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_assignee_id_fkey FOREIGN KEY (assignee_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_closed_by_fkey FOREIGN KEY (closed_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_follow_up_of_fkey FOREIGN KEY (follow_up_of) REFERENCES public.tickets(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_group_id_fkey FOREIGN KEY (group_id) REFERENCES public.loop_groups(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.tickets
    ADD CONSTRAINT tickets_opened_by_fkey FOREIGN KEY (opened_by) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.trend_blocks
    ADD CONSTRAINT trend_blocks_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.tuning_records
    ADD CONSTRAINT tuning_records_loop_id_fkey FOREIGN KEY (loop_id) REFERENCES public.loops(id) ON DELETE CASCADE;

ALTER TABLE ONLY public.tuning_records
    ADD CONSTRAINT tuning_records_ticket_id_fkey FOREIGN KEY (ticket_id) REFERENCES public.tickets(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.tuning_records
    ADD CONSTRAINT tuning_records_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.uploads
    ADD CONSTRAINT uploads_import_id_fkey FOREIGN KEY (import_id) REFERENCES public.imports(id) ON DELETE SET NULL;

ALTER TABLE ONLY public.uploads
    ADD CONSTRAINT uploads_user_id_fkey FOREIGN KEY (user_id) REFERENCES public.users(id) ON DELETE CASCADE;
