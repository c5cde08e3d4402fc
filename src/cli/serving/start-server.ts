import { once } from 'node:events';
import { createServer } from 'node:net';
import { buildApi } from '../../api/index.js';
import { openServer, type Place } from '../../service/index.js';
import { exitCode, Refusal } from '../refusal.js';
import { threadEntry } from '../thread-entry.js';
import { sweepSettings } from './serving-options.js';

export interface ServerSettings {
  readonly place: Place;
  readonly host: string;
  readonly port: number;
  readonly threads: number;
  readonly lockSeconds: number;
  readonly allowedHosts: readonly string[];
}

export interface RunningServer {
  /** Where it is reached, without a slash at the end. */
  readonly url: string;
  close(): Promise<void>;
}

/** The built page, beside this program. */
const page = new URL('../../../web/', import.meta.url);

/**
 * Starts a server: the record, the queue, the API and the page; and in an embedded installation the work
 * on jobs.
 * @throws {CodedError} where record or queue cannot be opened
 * @throws {Refusal} where the address cannot be listened on
 */
export async function startServer(settings: ServerSettings): Promise<RunningServer> {
  const { place, host, port, threads, lockSeconds, allowedHosts } = settings;
  // Found out before a folder is made and a database opened, which takes a while.
  await tryOutAddress(host, port);
  const server = await openServer({
    place,
    threads,
    lockDuration: lockSeconds * 1000,
    sweep: sweepSettings(lockSeconds),
    threadEntry,
  });
  const api = await buildApi({ service: server.service, page, allowedHosts });
  const close = async (): Promise<void> => {
    await api.close();
    // What is being worked on is in the record, and goes on at the next start.
    await server.close(0);
  };
  try {
    await api.listen({ host, port });
  } catch (error) {
    await close();
    throw refuseAddress(host, port, error);
  }
  const address = api.server.address();
  const at = typeof address === 'object' && address !== null ? address.port : port;
  const name = host === '0.0.0.0' || host === '::' ? '127.0.0.1' : host;
  return { url: `http://${name.includes(':') ? `[${name}]` : name}:${at}`, close };
}

/** @throws {Refusal} where nothing can listen there */
async function tryOutAddress(host: string, port: number): Promise<void> {
  const probe = createServer();
  try {
    await once(probe.listen(port, host), 'listening');
  } catch (error) {
    throw refuseAddress(host, port, error);
  } finally {
    probe.close();
  }
}

const reasons: Readonly<Record<string, string>> = {
  EADDRINUSE: 'another program listens there',
  EACCES: 'this user may not listen there',
  EADDRNOTAVAIL: 'this machine has no such address',
  ENOTFOUND: 'no machine is known by this name',
};

function refuseAddress(host: string, port: number, error: unknown): Refusal {
  const code = (error as { code?: string }).code ?? String(error);
  const complaint = {
    code: 'OPTION_INVALID',
    path: code === 'EADDRINUSE' || code === 'EACCES' ? '--port' : '--host',
    value: `${host}:${port}`,
    problem: `the server cannot listen here: ${reasons[code] ?? code}`,
    allowed: 'an address of this machine with a free port',
  } as const;
  return new Refusal(exitCode.failed, [complaint]);
}
