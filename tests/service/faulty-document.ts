import { exampleWith, type Loose } from '../documents.js';

/** One faulty document: what was done to the example, or the whole text, and the path reported. */
export interface FaultyDocument {
  readonly title: string;
  readonly path: string;
  readonly source: string | Uint8Array;
  /** What the message must say besides. */
  readonly says: RegExp;
}

/** A document given whole. */
export function source(
  title: string,
  text: string | Uint8Array,
  path: string,
  says: RegExp,
): FaultyDocument {
  return { title, path, source: text, says };
}

/** The example with an edit. */
export function change(
  title: string,
  path: string,
  edit: (job: Loose) => void,
  says = /./,
): FaultyDocument {
  return { title, path, says, source: JSON.stringify(exampleWith(edit)) };
}

/** The example with another value at the path reported; undefined takes the key away. */
export function set(title: string, path: string, value: unknown, says = /./): FaultyDocument {
  const steps = path.split(/[.[\]]+/).filter((step) => step !== '');
  const last = steps.pop() ?? '';
  return change(
    title,
    path,
    (job) => {
      let holder = job;
      for (const step of steps) holder = holder[step];
      holder[last] = value;
    },
    says,
  );
}

/** Puts another model in place of one response; the operating points go. */
export function model(job: Loose, index: number, value: object): void {
  job.unit.responses[index].model = value;
  job.unit.operatingPoints = [];
}

export function rational(numerator: readonly unknown[], denominator: readonly unknown[]): object {
  return { kind: 'transfer-function', numerator, denominator };
}

export const lag = { kind: 'first-order', gain: 1, timeConstant: 2, deadTime: 0 };

export function link(from: string, to: string, own: object): object {
  return { from, to, model: own };
}
