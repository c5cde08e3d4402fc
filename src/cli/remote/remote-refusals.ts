import { type ProblemDocument, problemSchema } from '../../contract/index.js';
import { printable } from '../printable.js';
import { type Complaint, type ExitCode, exitCode, Refusal } from '../refusal.js';

/** A server that could not be reached, or a connection to it that broke. */
export class ServerUnreachable extends Refusal {
  /** @param mayHaveArrived  false where the server cannot have seen the request */
  constructor(
    server: string,
    problem: string,
    readonly mayHaveArrived: boolean,
    allowed = 'a Heddle server that runs there: start one with heddle serve, or name another with --server',
  ) {
    super(exitCode.failed, [
      { code: 'SERVER_UNREACHABLE', path: printable(server), value: '', problem, allowed },
    ]);
    this.name = 'ServerUnreachable';
  }
}

/** A request that the server answered with a problem. */
export class RemoteProblem extends Refusal {
  /** @param subject  what was handed in, where it was a document */
  constructor(
    readonly problem: ProblemDocument,
    subject: string | undefined,
  ) {
    const faults = problem.faults ?? [];
    const complaints = faults.length > 0 ? faults.map(faultComplaint) : [wholeComplaint(problem)];
    const named = faults.length > 0 ? (subject ?? 'what was sent') : undefined;
    super(endingOf(problem), complaints, named, problem.more ?? 0);
    this.name = 'RemoteProblem';
  }
}

/** Whether the same may go well a little later. */
export const mayPass = (error: unknown): error is ServerUnreachable | RemoteProblem =>
  error instanceof ServerUnreachable ||
  (error instanceof RemoteProblem && error.problem.status === 503);

type RemoteFault = NonNullable<ProblemDocument['faults']>[number];

/** Texts from a server are texts from outside. */
function faultComplaint({ code, path, subject, value, problem, allowed }: RemoteFault): Complaint {
  return {
    code: code as Complaint['code'],
    path: printable(path),
    ...(subject === undefined ? {} : { subject: printable(subject) }),
    value: printable(value),
    problem: printable(problem),
    allowed: printable(allowed),
  };
}

const wholeComplaint = ({ code, title, detail }: ProblemDocument): Complaint => ({
  code,
  path: title,
  value: '',
  problem: printable(detail),
  allowed: '',
});

/** A request that is wrong in itself, against one that the server cannot answer as things stand. */
function endingOf({ status, code }: ProblemDocument): ExitCode {
  if (code === 'IDEMPOTENCY_KEY_REUSED') return exitCode.refused;
  return status >= 500 || status === 409 || status === 408 ? exitCode.failed : exitCode.refused;
}

/** The problem a response states, or that what answers is no Heddle server. */
export async function refusalOfResponse(
  server: string,
  response: Response,
  subject: string | undefined,
): Promise<Refusal> {
  const kind = mediaType(response);
  if (kind === 'application/problem+json') {
    const stated = problemSchema.safeParse(await response.json().catch(() => null));
    if (stated.success) return new RemoteProblem(stated.data, subject);
  }
  const target = response.headers.get('location');
  await response.body?.cancel().catch(() => undefined);
  const answer =
    target === null
      ? `it answers ${response.status} with ${printable(kind || 'nothing')}`
      : `it answers ${response.status} and points to ${printable(target)}`;
  return notHeddle(server, answer);
}

export function notHeddle(server: string, answer: string): Refusal {
  return new Refusal(exitCode.failed, [
    {
      code: 'SERVER_UNKNOWN',
      path: printable(server),
      value: '',
      problem: `what answers there is not a Heddle server this program knows: ${answer}`,
      allowed: 'the address of a Heddle server of the same release',
    },
  ]);
}

export const mediaType = (response: Response): string =>
  (response.headers.get('content-type') ?? '').split(';')[0]?.trim().toLowerCase() ?? '';
