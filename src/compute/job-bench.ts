import { type JobDocument, type Refused, readJob, type Warning } from '../contract/index.js';
import { compileJob, type Preparation, prepareJob, Workbench } from '../study/index.js';

/** A job with everything at hand to score settings for it. */
export interface OpenJob {
  readonly ok: true;
  readonly job: JobDocument;
  readonly warnings: readonly Warning[];
  readonly bench: Workbench;
}

const decoder = new TextDecoder();

/** Keeps what it has built for the latest job: who tries settings tries many. */
export class JobBench {
  private latest: { readonly key: string; readonly opened: OpenJob } | undefined;

  /**
   * @param preparation  the answer of the job's first task, where it has one
   * @throws {CodedError} where the job cannot be computed
   */
  open(stored: {
    readonly document: Uint8Array;
    readonly provenance: { readonly job: string };
    readonly preparation: Uint8Array | null;
  }): OpenJob | Refused {
    const { document, provenance, preparation } = stored;
    const key = `${provenance.job} ${preparation === null}`;
    if (this.latest?.key === key) return this.latest.opened;
    const read = readJob(document);
    if (!read.ok) return read;
    const { job, warnings } = read;
    const compiled = compileJob(job);
    const bench = new Workbench(
      compiled,
      preparation === null ? prepareJob(compiled) : preparationIn(preparation),
    );
    const opened: OpenJob = { ok: true, job, warnings, bench };
    this.latest = { key, opened };
    return opened;
  }
}

const preparationIn = (bytes: Uint8Array): Preparation =>
  (JSON.parse(decoder.decode(bytes)) as { readonly preparation: Preparation }).preparation;
