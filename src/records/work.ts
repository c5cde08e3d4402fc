import { sql } from 'kysely';
import type { Records, RecordTransaction } from './database.js';
import { tellChange } from './jobs.js';

/** The place of a stage's work: of which job, by which version of the calculation, in which epoch. */
export interface StageKey {
  readonly job: string;
  readonly compute: string;
  readonly epoch: number;
  readonly stage: number;
}

/** A task of a stage, by its number. */
export interface TaskKey extends StageKey {
  readonly task: number;
}

/** The hash of the document of some work's job, unless it has ended or its work was handed out anew. */
export async function findJobAtWork(
  db: Records,
  key: StageKey,
): Promise<{ readonly hash: string } | undefined> {
  return db
    .selectFrom('jobs')
    .select('hash')
    .where('id', '=', key.job)
    .where('epoch', '=', key.epoch)
    .where('compute', '=', key.compute)
    .where('state', 'in', ['accepted', 'running'])
    .executeTakeFirst();
}

/**
 * A task that somebody begins, counted.
 * @returns its input and the number of this beginning; undefined where it has been answered already
 */
export async function beginTask(
  db: Records,
  key: TaskKey,
): Promise<{ readonly input: Uint8Array; readonly starts: number } | undefined> {
  const { rows } = await sql<{ input: Uint8Array; starts: number }>`
    update heddle.tasks t set starts = starts + 1
    where job_id = ${key.job} and compute = ${key.compute}
      and stage = ${key.stage} and task = ${key.task}
      and not exists (select from heddle.results r
        where r.job_id = t.job_id and r.compute = t.compute
          and r.stage = t.stage and r.task = t.task)
    returning input, starts`.execute(db);
  return rows[0];
}

/** What a task answered, and what it took. */
export interface TaskOutput {
  readonly output: Uint8Array;
  readonly hash: string;
  readonly evaluations: number;
  readonly cpuSeconds: number;
}

/**
 * Writes the answer of a task, once, and only while its job is running in the task's epoch.
 * @returns `differs` where another answer stands there already: equal work gave unequal bytes
 */
export async function recordResult(
  db: Records,
  key: TaskKey,
  result: TaskOutput,
): Promise<'recorded' | 'known' | 'differs' | 'abandoned'> {
  return db.transaction().execute(async (transaction) => {
    const { rows } = await sql<{ task: number }>`
      insert into heddle.results
        (job_id, compute, stage, task, epoch, output, hash, evaluations, cpu_seconds)
      select id, compute, ${key.stage}::int, ${key.task}::int, epoch,
        ${result.output}::bytea, ${result.hash}::text,
        ${result.evaluations}::int, ${result.cpuSeconds}::float8
      from heddle.jobs
      where id = ${key.job} and state = 'running' and epoch = ${key.epoch}
        and compute = ${key.compute}
      on conflict do nothing
      returning task`.execute(transaction);
    if (rows.length > 0) {
      await tellChange(transaction, key.job);
      return 'recorded';
    }
    const known = await transaction
      .selectFrom('results')
      .select('hash')
      .where('job_id', '=', key.job)
      .where('compute', '=', key.compute)
      .where('stage', '=', key.stage)
      .where('task', '=', key.task)
      .executeTakeFirst();
    if (known === undefined) return 'abandoned';
    return known.hash === result.hash ? 'known' : 'differs';
  });
}

/** The answer of one task. */
export async function findResult(db: Records, key: TaskKey): Promise<Uint8Array | undefined> {
  const row = await db
    .selectFrom('results')
    .select('output')
    .where('job_id', '=', key.job)
    .where('compute', '=', key.compute)
    .where('stage', '=', key.stage)
    .where('task', '=', key.task)
    .executeTakeFirst();
  return row?.output;
}

/**
 * The answers of all stages up to one, in order.
 * @returns undefined while an answer is missing
 */
export async function readResults(db: Records, key: StageKey): Promise<Uint8Array[][] | undefined> {
  const stages = await db
    .selectFrom('stages')
    .select(['stage', 'tasks'])
    .where('job_id', '=', key.job)
    .where('compute', '=', key.compute)
    .where('stage', '<=', key.stage)
    .orderBy('stage')
    .execute();
  const rows = await db
    .selectFrom('results')
    .select(['stage', 'output'])
    .where('job_id', '=', key.job)
    .where('compute', '=', key.compute)
    .where('stage', '<=', key.stage)
    .orderBy('stage')
    .orderBy('task')
    .execute();
  const results = stages.map(({ stage }) =>
    rows.filter((row) => row.stage === stage).map(({ output }) => output),
  );
  const isWhole = stages.every(({ tasks }, index) => results[index]?.length === tasks);
  return isWhole && stages.length === key.stage + 1 ? results : undefined;
}

/** The numbers of a stage's tasks that have no answer yet; null where there is no such stage. */
export async function openTasks(db: Records, key: StageKey): Promise<number[] | null> {
  const { rows } = await sql<{ task: number | null }>`
    select t.task from heddle.stages s
    left join heddle.tasks t on t.job_id = s.job_id and t.compute = s.compute
      and t.stage = s.stage and not exists (select from heddle.results r
        where r.job_id = t.job_id and r.compute = t.compute
          and r.stage = t.stage and r.task = t.task)
    where s.job_id = ${key.job} and s.compute = ${key.compute} and s.stage = ${key.stage}
    order by t.task`.execute(db);
  if (rows.length === 0) return null;
  return rows.flatMap(({ task }) => (task === null ? [] : [task]));
}

/**
 * Holds a job's row against whoever else would move it on, and says whether its work is still that of
 * the key.
 */
async function holdJob(db: RecordTransaction, key: StageKey): Promise<boolean> {
  const row = await db
    .selectFrom('jobs')
    .select('id')
    .where('id', '=', key.job)
    .where('epoch', '=', key.epoch)
    .where('compute', '=', key.compute)
    .where('state', 'in', ['accepted', 'running'])
    .forUpdate()
    .executeTakeFirst();
  return row !== undefined;
}

/**
 * Records a stage with all its tasks, to be queued. A stage that is there already stays as it is.
 * @returns false where the job has ended or its work was handed out anew
 */
export async function recordStage(
  db: RecordTransaction,
  key: StageKey,
  stage: { readonly name: string; readonly tasks: readonly Uint8Array[] },
): Promise<boolean> {
  if (!(await holdJob(db, key))) return false;
  const { job: job_id, compute } = key;
  const fresh = await db
    .insertInto('stages')
    .values({ job_id, compute, stage: key.stage, name: stage.name, tasks: stage.tasks.length })
    .onConflict((conflict) => conflict.doNothing())
    .returning('stage')
    .executeTakeFirst();
  if (fresh !== undefined) {
    for (const [task, input] of stage.tasks.entries()) {
      const row = { job_id, compute, stage: key.stage, task, input };
      await db.insertInto('tasks').values(row).execute();
    }
  }
  await queueLater(db, key);
  await touchJob(db, job_id);
  await tellChange(db, job_id);
  return true;
}

/** Leaves word that a stage's work is to be queued. */
export async function queueLater(db: RecordTransaction, key: StageKey): Promise<void> {
  const { job: job_id, compute, epoch, stage } = key;
  await db.insertInto('outbox').values({ job_id, compute, epoch, stage }).execute();
}

async function touchJob(db: RecordTransaction, job: string): Promise<void> {
  await db
    .updateTable('jobs')
    .set({ touched_at: sql<Date>`now()` })
    .where('id', '=', job)
    .execute();
}

/** A front with the documents of its tuning sets. */
export interface FoundFront {
  readonly document: Uint8Array;
  readonly hash: string;
  readonly details: readonly {
    readonly id: string;
    readonly document: Uint8Array;
    readonly hash: string;
  }[];
}

/** @returns false where the job has ended or its work was handed out anew */
export async function recordFront(
  db: RecordTransaction,
  key: StageKey,
  front: FoundFront,
): Promise<boolean> {
  if (!(await holdJob(db, key))) return false;
  const { job: job_id, compute } = key;
  await db
    .insertInto('fronts')
    .values({ job_id, compute, document: front.document, hash: front.hash })
    .execute();
  for (const { id, document, hash } of front.details) {
    await db.insertInto('details').values({ job_id, id, document, hash }).execute();
  }
  return true;
}
