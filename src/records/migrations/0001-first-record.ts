import { type Kysely, sql } from 'kysely';

/**
 * The record as first released. A released migration is never edited: what changes afterwards is a
 * migration of its own.
 */
export async function firstRecord(db: Kysely<unknown>): Promise<void> {
  for (const statement of statements) await sql.raw(statement).execute(db);
}

const statements = [
  `create table heddle.jobs (
    id text primary key,
    sequence integer generated always as identity unique,
    document bytea not null,
    hash text not null,
    format text not null,
    unit_name text not null,
    loops integer not null,
    idempotency_key text unique,
    compute text not null,
    epoch integer not null default 0,
    state text not null check (state in ('accepted', 'running', 'done', 'failed', 'cancelled')),
    accepted_at timestamptz not null default now(),
    started_at timestamptz,
    ended_at timestamptz,
    touched_at timestamptz not null default now(),
    feasible boolean,
    alternatives integer,
    failure_code text,
    failure_message text,
    cancelled_by text,
    cancel_reason text
  )`,
  `create index jobs_unfinished on heddle.jobs (touched_at) where state in ('accepted', 'running')`,
  `create table heddle.stages (
    job_id text not null references heddle.jobs,
    compute text not null,
    stage integer not null,
    name text not null,
    tasks integer not null,
    primary key (job_id, compute, stage)
  )`,
  `create table heddle.tasks (
    job_id text not null,
    compute text not null,
    stage integer not null,
    task integer not null,
    input bytea not null,
    starts integer not null default 0,
    primary key (job_id, compute, stage, task),
    foreign key (job_id, compute, stage) references heddle.stages
  )`,
  `create table heddle.results (
    job_id text not null,
    compute text not null,
    stage integer not null,
    task integer not null,
    epoch integer not null,
    output bytea not null,
    hash text not null,
    evaluations integer not null,
    cpu_seconds double precision not null,
    recorded_at timestamptz not null default now(),
    primary key (job_id, compute, stage, task),
    foreign key (job_id, compute, stage, task) references heddle.tasks
  )`,
  `create table heddle.fronts (
    job_id text primary key references heddle.jobs,
    compute text not null,
    document bytea not null,
    hash text not null,
    recorded_at timestamptz not null default now()
  )`,
  `create table heddle.details (
    job_id text not null references heddle.fronts,
    id text not null,
    document bytea not null,
    hash text not null,
    primary key (job_id, id)
  )`,
  `create table heddle.changes (
    id text primary key,
    sequence integer generated always as identity unique,
    job_id text not null references heddle.jobs,
    alternative text not null,
    state text not null check (state in ('proposed', 'approved', 'rejected')),
    job_hash text not null,
    front_hash text not null,
    detail_hash text not null,
    proposed_by text not null,
    proposal_reason text not null,
    proposed_at timestamptz not null default now(),
    decided_by text,
    decision_reason text,
    decided_at timestamptz,
    check ((state = 'proposed') = (decided_at is null))
  )`,
  `create index changes_of_job on heddle.changes (job_id)`,
  `create table heddle.outbox (
    id integer primary key generated always as identity,
    job_id text not null references heddle.jobs,
    compute text not null,
    epoch integer not null,
    stage integer not null
  )`,
  `create table heddle.workers (
    id text primary key,
    compute text not null,
    threads integer not null,
    host text not null,
    pid integer not null,
    started_at timestamptz not null default now(),
    seen_at timestamptz not null default now()
  )`,
  `create table heddle.incidents (
    id integer primary key generated always as identity,
    job_id text not null references heddle.jobs,
    kind text not null,
    detail text not null,
    happened_at timestamptz not null default now()
  )`,
  `create index incidents_of_job on heddle.incidents (job_id)`,
] as const;
