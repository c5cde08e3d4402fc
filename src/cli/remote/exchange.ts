import { printable } from '../printable.js';
import { refusalOfResponse, ServerUnreachable } from './remote-refusals.js';
import { addressAt } from './server-option.js';

/** One thing asked of a server. */
export interface Asked {
  /** `GET` where there is no body. */
  readonly method?: 'GET' | 'POST';
  /** Below the server's address, without a leading slash. */
  readonly path: string;
  readonly headers?: Readonly<Record<string, string>>;
  readonly body?: Uint8Array | string;
  /** What is handed in, in words, where it is a document that may have faults. */
  readonly subject?: string;
  readonly signal?: AbortSignal;
}

/** How long an answer may take to begin, ms. */
const patienceMs = 60_000;

/**
 * The answer of a server that did what was asked; its body is still to be read.
 * @throws {Refusal} what the server finds wrong, that it is none of ours, or that it cannot be reached
 */
export async function exchange(server: string, asked: Asked): Promise<Response> {
  const { method = 'GET', path, headers, body, subject, signal } = asked;
  const late = new AbortController();
  const timer = setTimeout(() => late.abort(), patienceMs);
  try {
    const response = await fetch(addressAt(server, path), {
      method,
      redirect: 'manual',
      headers: { accept: 'application/json', ...headers },
      signal: signal === undefined ? late.signal : AbortSignal.any([signal, late.signal]),
      ...(body === undefined
        ? {}
        : { body: typeof body === 'string' ? body : new Uint8Array(body) }),
    });
    if (response.ok) return response;
    throw await refusalOfResponse(server, response, subject);
  } catch (error) {
    const words = `no answer within ${patienceMs / 1000} s`;
    const isLate = late.signal.aborted && !signal?.aborted;
    throw isLate ? new ServerUnreachable(server, words, true) : brokenOff(server, error, signal);
  } finally {
    clearTimeout(timer);
  }
}

/**
 * The whole body of an answer.
 * @throws {Refusal} where the connection breaks before its end
 */
export async function bodyOf(
  server: string,
  response: Response,
  signal?: AbortSignal,
): Promise<Uint8Array> {
  try {
    return new Uint8Array(await response.arrayBuffer());
  } catch (error) {
    throw brokenOff(server, error, signal);
  }
}

/** What went wrong below HTTP, in words; everything else, an abort too, stays what it is. */
export function brokenOff(server: string, error: unknown, signal?: AbortSignal): unknown {
  if (signal?.aborted || !(error instanceof TypeError)) return error;
  const code = codeOf(error);
  const [words, mayHaveArrived] = causes[code] ?? [`the connection failed (${code})`, true];
  return new ServerUnreachable(server, words, mayHaveArrived);
}

const causes: Readonly<Record<string, readonly [words: string, mayHaveArrived: boolean]>> = {
  ECONNREFUSED: ['nothing listens there', false],
  ENOTFOUND: ['there is no such host', false],
  EAI_AGAIN: ['the name of the host cannot be looked up', false],
  EHOSTUNREACH: ['there is no way to this host', false],
  ENETUNREACH: ['there is no way to its network', false],
  UND_ERR_CONNECT_TIMEOUT: ['the host does not answer', false],
  ETIMEDOUT: ['the host does not answer', true],
  ECONNRESET: ['the connection broke', true],
  EPIPE: ['the connection broke', true],
  UND_ERR_SOCKET: ['the connection broke', true],
  UND_ERR_BODY_TIMEOUT: ['the connection went silent', true],
  UND_ERR_HEADERS_TIMEOUT: ['there is no answer', true],
  HPE_INVALID_CONSTANT: ['what answers there does not speak HTTP', true],
  EPROTO: ['what answers there does not speak HTTPS', false],
};

/** The innermost code: `fetch failed` says nothing, its cause does, and may be several. */
function codeOf(error: Error): string {
  const { cause } = error;
  const tried = cause instanceof AggregateError ? cause.errors[0] : cause;
  const code = (tried as { code?: unknown } | undefined)?.code;
  if (typeof code === 'string') return code;
  return printable(tried instanceof Error ? tried.message : error.message);
}
