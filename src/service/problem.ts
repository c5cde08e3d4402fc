import { type Fault, type ProblemCode, problemCodes, type Refused } from '../contract/index.js';

/** A request that cannot be answered, and why: what a caller can act on. */
export class ServiceProblem extends Error {
  readonly code: ProblemCode;
  /** The faults of a refused document, and how many more there are. */
  readonly refused: { readonly faults: readonly Fault[]; readonly more: number } | undefined;

  /** @param detail  what happened, with place and value, and what is allowed */
  constructor(
    code: ProblemCode,
    detail: string,
    options: { readonly refused?: Refused; readonly cause?: unknown } = {},
  ) {
    super(detail, { cause: options.cause });
    this.name = 'ServiceProblem';
    this.code = code;
    this.refused = options.refused;
  }

  get status(): number {
    return problemCodes[this.code].status;
  }
}
