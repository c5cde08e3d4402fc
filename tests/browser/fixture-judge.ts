import { createHash } from 'node:crypto';
import { type ThreadRequest, ThreadWorker } from '../../src/compute/index.js';
import type { AlternativeDetail, Keeping, OwnSettings, Refused } from '../../src/contract/index.js';
import { ServiceProblem } from '../../src/service/index.js';

const parsed = (bytes: Uint8Array): unknown => JSON.parse(new TextDecoder().decode(bytes));

/** Scores and judges settings as a thread of the server would, here and now, and keeps them. */
export class FixtureJudge {
  /** The settings of every trial asked for, in their order. */
  readonly trials: unknown[] = [];
  /** The most trials that were under way at once. */
  mostAtOnce = 0;
  /** What a trial waits for before it is answered. */
  gate: Promise<void> = Promise.resolve();
  private underWay = 0;
  private readonly worker = new ThreadWorker();
  private readonly kept: { readonly own: OwnSettings; readonly document: AlternativeDetail }[] = [];

  async evaluate(
    document: Uint8Array,
    settings: Uint8Array,
    models: 'search' | 'all',
  ): Promise<Uint8Array> {
    this.trials.push(parsed(settings));
    this.underWay += 1;
    this.mostAtOnce = Math.max(this.mostAtOnce, this.underWay);
    await this.gate;
    this.underWay -= 1;
    const given = { ...stored(document), settings, models, preparation: null };
    return this.ask({ kind: 'evaluate', ...given }) as Uint8Array;
  }

  keep(job: string, document: Uint8Array, { name, person, settings }: Keeping): OwnSettings {
    const id = `U${String(this.keptFor(job).length + 1).padStart(2, '0')}`;
    const bytes = new TextEncoder().encode(JSON.stringify({ settings }));
    const given = { ...stored(document), id, settings: bytes, preparation: null };
    const judged = this.ask({ kind: 'judge', ...given }) as {
      readonly summary: Uint8Array;
      readonly detail: { readonly document: Uint8Array; readonly hash: string };
    };
    const about = { id, job, name, person, keptAt: '2026-03-02T08:05:00.000Z' };
    const summary = parsed(judged.summary) as Omit<OwnSettings, keyof typeof about | 'detail'>;
    const own: OwnSettings = { ...about, ...summary, detail: judged.detail.hash };
    this.kept.push({ own, document: parsed(judged.detail.document) as AlternativeDetail });
    return own;
  }

  keptFor(job: string): OwnSettings[] {
    return this.kept.map(({ own }) => own).filter((own) => own.job === job);
  }

  documentOf(job: string, id: string): AlternativeDetail | undefined {
    return this.kept.find(({ own }) => own.job === job && own.id === id)?.document;
  }

  private ask(request: ThreadRequest): unknown {
    const answer = this.worker.do(request);
    if ('ok' in answer && answer.ok === false) {
      throw new ServiceProblem('DOCUMENT_REFUSED', 'faults', { refused: answer as Refused });
    }
    return answer;
  }
}

const stored = (document: Uint8Array) => ({
  document,
  provenance: { job: createHash('sha256').update(document).digest('hex'), compute: '0'.repeat(64) },
});
