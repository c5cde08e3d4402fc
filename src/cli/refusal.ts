import type { ErrorCode } from '../base/index.js';
import type { ThreadFailureCode } from '../compute/index.js';
import {
  describeFault,
  type Fault,
  type ProblemCode,
  type Refused,
  type SpreadsheetFaultCode,
} from '../contract/index.js';
import { printable } from './printable.js';

/** How a command ends. */
export const exitCode = {
  done: 0,
  failed: 1,
  /** A bad document, or a command that was not given rightly. */
  refused: 2,
  /** The limits cannot be met together. */
  infeasible: 3,
  hungUp: 129,
  interrupted: 130,
  terminated: 143,
} as const;

export type ExitCode = (typeof exitCode)[keyof typeof exitCode];

/** Something wrong with a document, a file or an option: the same shape for all of them. */
export type Complaint = Omit<Fault, 'code'> & {
  readonly code:
    | Fault['code']
    | ErrorCode
    | ThreadFailureCode
    | ProblemCode
    | SpreadsheetFaultCode
    | 'SERVER_UNREACHABLE'
    | 'SERVER_UNKNOWN'
    | 'UNFORESEEN';
};

/** An end that is nobody's bug: what is wrong, each thing on a line, and the exit code it means. */
export class Refusal extends Error {
  constructor(
    readonly exitCode: ExitCode,
    readonly complaints: readonly Complaint[],
    /** What was refused, in words that precede the list of what is wrong with it. */
    readonly subject?: string,
    /** Complaints beyond those listed. */
    readonly more = 0,
  ) {
    super(subject ?? complaints[0]?.problem ?? 'refused');
    this.name = 'Refusal';
  }
}

/** The refusal of a document with faults. */
export function refuseDocument(name: string, { faults, more }: Refused): Refusal {
  return new Refusal(exitCode.refused, faults, name, more);
}

/** The refusal of an option's value or of a way to call a command. */
export function refuseOption(
  option: string,
  value: string,
  problem: string,
  allowed: string,
): Refusal {
  const shown = value === '' ? 'nothing' : `"${printable(value)}"`;
  const complaint = {
    code: 'OPTION_INVALID',
    path: option,
    value: shown,
    problem,
    allowed,
  } as const;
  return new Refusal(exitCode.refused, [complaint]);
}

/** A complaint on one line: path, what is wrong, what was found and what is allowed where that says more. */
export function complaintLine(complaint: Complaint): string {
  const { path, value, problem, allowed } = complaint;
  if (allowed === '') return `${path}: ${problem}`;
  if (value === '') return `${path}: ${problem}; allowed: ${allowed}`;
  return describeFault(complaint as Fault);
}
