import type { Keeping, OwnSettings, OwnSettingsList } from '../contract/index.js';
import {
  countOwnSettings,
  type Database,
  findResult,
  insertOwnSettings,
  listOwnSettings,
  type OwnSettingsRow,
} from '../records/index.js';
import type { ScoredModels } from '../study/index.js';
import type { CalculationDesk } from './calculation-desk.js';
import type { JobDesk } from './job-desk.js';
import type { Ledger } from './ledger.js';

/** Scores settings that somebody tries on the unit of a job, and keeps those that are to be kept. */
export class OwnSettingsDesk {
  constructor(
    private readonly database: Database,
    private readonly ledger: Ledger,
    private readonly calculations: CalculationDesk,
    private readonly jobs: JobDesk,
  ) {}

  /** The bytes of an evaluation document. */
  async evaluate(
    job: string,
    settings: Uint8Array,
    models: ScoredModels,
    signal: AbortSignal,
  ): Promise<Uint8Array> {
    return this.calculations.evaluateFor(await this.opened(job), settings, models, signal);
  }

  /** Judges settings as an alternative is, and keeps them under a name. */
  async keep(job: string, keeping: Keeping, signal: AbortSignal): Promise<OwnSettings> {
    const { name, person } = keeping;
    const { records } = this.database;
    const opened = await this.opened(job);
    const settings = new TextEncoder().encode(JSON.stringify({ settings: keeping.settings }));
    for (;;) {
      const id = `U${String((await countOwnSettings(records, job)) + 1).padStart(2, '0')}`;
      const judged = await this.calculations.judgeFor(opened, id, settings, signal);
      const { summary, detail } = judged;
      const at = new Date();
      const kept = await this.ledger.inTurn(async (write) => {
        if ((await countOwnSettings(records, job)) >= Number(id.slice(1))) return undefined;
        const act = { id, at: at.toISOString(), person, reason: null };
        const documents = { summary: base64Of(summary), document: base64Of(detail.document) };
        await write({ kind: 'kept', ...act, job, name, ...documents, hash: detail.hash });
        const row = { job_id: job, id, name, kept_by: person, kept_at: at, summary, ...detail };
        return insertOwnSettings(records, row);
      });
      // Somebody else has taken that name meanwhile.
      if (kept !== undefined) return view(kept);
    }
  }

  async list(job: string): Promise<OwnSettingsList> {
    await this.jobs.job(job);
    const rows = await listOwnSettings(this.database.records, job);
    return { own: rows.map(view) };
  }

  private async opened(job: string) {
    const document = await this.jobs.document(job);
    const { compute } = await this.jobs.job(job);
    const first = { job, compute, epoch: 0, stage: 0, task: 0 };
    const preparation = await findResult(this.database.records, first);
    return { document, preparation: preparation ?? null };
  }
}

const base64Of = (bytes: Uint8Array): string => Buffer.from(bytes).toString('base64');

const decoder = new TextDecoder();

/** Settings somebody kept, as everybody sees them. */
function view(row: OwnSettingsRow): OwnSettings {
  const summary = JSON.parse(decoder.decode(row.summary)) as Omit<
    OwnSettings,
    'id' | 'job' | 'name' | 'person' | 'keptAt' | 'detail'
  >;
  return {
    id: row.id,
    job: row.job_id,
    name: row.name,
    person: row.kept_by,
    keptAt: row.kept_at.toISOString(),
    ...summary,
    detail: row.hash,
  };
}
