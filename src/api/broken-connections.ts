import { type IncomingMessage, type ServerResponse, STATUS_CODES } from 'node:http';
import { Socket } from 'node:net';
import type { Duplex } from 'node:stream';
import type { FastifyReply, FastifyRequest } from 'fastify';
import { ServiceProblem } from '../service/index.js';
import { mostMessageBytes } from './bodies.js';
import { problemBytes, problemMediaType } from './problem-answer.js';

/** How long a connection that was refused stays open for the caller to read why, in ms. */
const lingering = 1000;

interface Exchange {
  readonly request: IncomingMessage;
  readonly answer: ServerResponse;
}

/**
 * Connections that cannot be read on: what came is no HTTP, came too slowly, or is a body nobody
 * wants. Each is told why and closed; the rest of what it sends is never read.
 */
export class BrokenConnections {
  private readonly exchanges = new WeakMap<Duplex, Exchange>();
  private readonly told = new WeakSet<Duplex>();

  /** Remembers what is being answered, so that no refusal lands in the middle of it. */
  watch(request: IncomingMessage, answer: ServerResponse): void {
    this.exchanges.set(request.socket, { request, answer });
  }

  /** Tells a connection what the parser of requests found wrong with it. */
  refuseBroken(error: NodeJS.ErrnoException, socket: Duplex): void {
    const inBody = this.exchanges.get(socket)?.request.complete === false;
    this.refuse(connectionProblem(error, inBody), socket);
  }

  /** Tells a connection why it is closed, where nothing else is being written on it. */
  refuse(problem: ServiceProblem, socket: Duplex): void {
    if (this.told.has(socket)) return;
    this.told.add(socket);
    const answer = this.exchanges.get(socket)?.answer;
    const begun = answer?.headersSent === true && !answer.writableFinished;
    if (begun || socket.destroyed || !socket.writable) {
      socket.destroy();
      return;
    }
    const body = problemBytes(problem);
    const head = [
      `HTTP/1.1 ${problem.status} ${STATUS_CODES[problem.status]}`,
      `Content-Type: ${problemMediaType}`,
      `Content-Length: ${body.length}`,
      'Cache-Control: no-store',
      'X-Content-Type-Options: nosniff',
      'Connection: close',
    ];
    socket.write(`${head.join('\r\n')}\r\n\r\n`);
    endSlowly(socket, body);
  }
}

/**
 * Keeps a refused body from being read: the answer closes the connection, and what was not read by
 * then never is. A caller still sending would lose the answer if the connection were cut at once, so
 * that happens a moment later.
 */
export function leaveBodyUnread({ raw }: FastifyRequest, reply: FastifyReply): void {
  if (raw.complete || !(raw.socket instanceof Socket)) return;
  const length = Number(raw.headers['content-length'] ?? Number.NaN);
  const isSmall = raw.headers['transfer-encoding'] === undefined && !(length > mostMessageBytes);
  if (isSmall) return;
  reply.header('connection', 'close');
  raw.pause();
  // Marks the body as taken care of, or the server would read all of it once the answer is out.
  raw.read(0);
  const { socket } = raw;
  socket.destroySoon = () => endSlowly(socket);
}

function connectionProblem(error: NodeJS.ErrnoException, inBody: boolean): ServiceProblem {
  const { code = '' } = error;
  const because = { cause: error };
  if (code === 'ERR_HTTP_REQUEST_TIMEOUT') {
    return new ServiceProblem('BODY_TOO_SLOW', 'the request took too long to arrive', because);
  }
  if (code === 'HPE_HEADER_OVERFLOW') {
    return new ServiceProblem('HEADERS_TOO_LARGE', 'address and headers are too long', because);
  }
  if (inBody || ofFraming.includes(code)) {
    const detail = `the body cannot be taken apart: ${words(error)}`;
    return new ServiceProblem('BODY_INVALID', detail, because);
  }
  return new ServiceProblem('REQUEST_INVALID', `this is no HTTP/1.1: ${words(error)}`, because);
}

/** What is wrong with how a body is announced. */
const ofFraming: readonly string[] = [
  'HPE_INVALID_CONTENT_LENGTH',
  'HPE_UNEXPECTED_CONTENT_LENGTH',
  'HPE_INVALID_TRANSFER_ENCODING',
];

function words(error: Error & { readonly reason?: unknown }): string {
  return typeof error.reason === 'string' ? error.reason : 'it cannot be read';
}

function endSlowly(socket: Duplex, last?: Buffer): void {
  socket.end(last);
  const timer = setTimeout(() => socket.destroy(), lingering);
  socket.once('close', () => clearTimeout(timer));
}

/** Whether a body is announced that no address would take, told before any of it is sent. */
export function announcesTooMuch(request: IncomingMessage, most: number): boolean {
  return Number(request.headers['content-length']) > most;
}
