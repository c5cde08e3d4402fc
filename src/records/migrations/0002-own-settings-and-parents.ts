import { type Kysely, sql } from 'kysely';

/** Settings that people try for themselves, and jobs that are run again with changes. */
export async function ownSettingsAndParents(db: Kysely<unknown>): Promise<void> {
  for (const statement of statements) await sql.raw(statement).execute(db);
}

const statements = [
  `alter table heddle.jobs add column parent text references heddle.jobs`,
  `create table heddle.own_settings (
    job_id text not null references heddle.jobs,
    id text not null,
    name text not null,
    kept_by text not null,
    summary bytea not null,
    document bytea not null,
    hash text not null,
    kept_at timestamptz not null default now(),
    primary key (job_id, id)
  )`,
] as const;
