import { excerpt, pathText, printable, shortened } from './excerpt.js';
import { type Fault, type FaultCode, mostFaults, type Warning } from './faults.js';

/** A place in a document, from its root. */
export type Path = readonly PropertyKey[];

/**
 * What a reading of one document has found so far. Values and entry names in the messages are
 * taken from the document as it was written.
 */
export class Findings {
  readonly faults: Fault[] = [];
  readonly warnings: Warning[] = [];
  /** Faults beyond those listed, as far as they were counted. */
  more = 0;

  constructor(private readonly written: unknown) {}

  /** Adds a fault at a place; its value is the one written there. */
  fault(code: FaultCode, path: Path, problem: string, allowed: string): void {
    if (this.faults.length >= mostFaults) {
      this.more += 1;
      return;
    }
    const subject = subjectOf(this.written, path);
    const value = excerpt(valueAt(this.written, path));
    const place = { code, path: pathText(path), ...(subject === undefined ? {} : { subject }) };
    this.faults.push({ ...place, value, problem: printable(problem), allowed: printable(allowed) });
  }

  /** Adds something the author should know, though the document is accepted. */
  warning(path: Path, problem: string): void {
    const value = excerpt(valueAt(this.written, path));
    this.warnings.push({ path: pathText(path), value, problem: printable(problem) });
  }
}

/** What is written at a place, inherited properties set aside. */
export function valueAt(written: unknown, path: Path): unknown {
  let value = written;
  for (const step of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, step))
      return undefined;
    value = (value as Record<PropertyKey, unknown>)[step];
  }
  return value;
}

/** The tag, pair or name of the innermost list entry that a place lies in. */
function subjectOf(written: unknown, path: Path): string | undefined {
  for (let depth = path.length; depth > 0; depth -= 1) {
    if (typeof path[depth - 1] !== 'number') continue;
    const name = nameOf(valueAt(written, path.slice(0, depth)));
    if (name !== undefined) return name;
  }
  return undefined;
}

function nameOf(entry: unknown): string | undefined {
  const text = (key: string): string | undefined => {
    const value = valueAt(entry, [key]);
    return typeof value === 'string' && value !== '' ? shortened(value) : undefined;
  };
  const from = text('from') ?? setpointText(valueAt(entry, ['from', 'setpointOf']));
  const to = text('to');
  if (from !== undefined && to !== undefined) return `${from} -> ${to}`;
  return text('tag') ?? text('name');
}

function setpointText(tag: unknown): string | undefined {
  return typeof tag === 'string' ? `setpoint of ${shortened(tag)}` : undefined;
}
