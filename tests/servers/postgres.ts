import { execFile } from 'node:child_process';
import { readFileSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { promisify } from 'node:util';
import { Client } from 'pg';
import { findProgram } from '../../src/bootstrap/programs.mjs';
import { makeServerFolder } from './folders.js';
import { OwnServer } from './own-server.js';

const run = promisify(execFile);

const role = 'heddle';

/** A PostgreSQL server of a test's own. */
export interface PostgresServer {
  /** URL of the database `postgres`, the same over restarts. */
  readonly url: string;
  readonly port: number;
  /** Process id of the server; another one after a restart. */
  readonly pid: number;
  /** Its files, gone once it is stopped. */
  readonly folder: string;
  /** Ends it for good and removes its files. */
  stop(): Promise<void>;
  /** kill -9 of the server; returns when its connections are gone as well. Committed rows stay. */
  kill(): Promise<void>;
  /** Starts it again on its files, stopping it first where it runs. */
  restart(): Promise<void>;
  /** Makes an empty database and answers with its URL. */
  createDatabase(name: string): Promise<string>;
}

/**
 * Settings of a server that need not outlive the machine, only its own death: nothing waits for the
 * disk, but every commit is handed to the system before it is answered.
 */
const settings: Readonly<Record<string, string>> = {
  listen_addresses: '127.0.0.1',
  unix_socket_directories: '',
  fsync: 'off',
  full_page_writes: 'off',
  max_connections: '200',
  shared_buffers: '32MB',
  dynamic_shared_memory_type: 'mmap',
  jit: 'off',
};

/** Makes the files of a new server, to be copied by each that starts. */
export async function makePostgresTemplate(): Promise<string> {
  const user = serverUser();
  const folder = makeServerFolder(user);
  try {
    const initdb = [
      ...['--pgdata', join(folder, 'data'), '--username', role, '--auth', 'trust'],
      ...['--locale', 'C', '--encoding', 'UTF8', '--no-sync'],
    ];
    await run(join(postgresFolder(), 'initdb'), initdb, {
      cwd: folder,
      env: environment(),
      ...user,
    });
    return folder;
  } catch (error) {
    rmSync(folder, { recursive: true, force: true });
    throw error;
  }
}

/** Starts a server on a copy of the template and a free port of the loopback interface. */
export async function startPostgresFrom(template: string): Promise<PostgresServer> {
  const user = serverUser();
  const folder = makeServerFolder(user);
  await run('cp', ['-Rp', join(template, 'data'), folder]);
  const server = await OwnServer.start({
    folder,
    program: join(postgresFolder(), 'postgres'),
    parameters: (port) => [
      ...['-D', join(folder, 'data'), '-p', String(port)],
      ...Object.entries(settings).flatMap(([name, value]) => ['-c', `${name}=${value}`]),
    ],
    environment: environment(),
    listening: /ready to accept connections/,
    greet: (port) => ask(urlOf(port, 'postgres'), 'select 1'),
    stopSignal: 'SIGINT',
    lastSignal: 'SIGQUIT',
    ...(user && { user }),
  });
  const { port } = server;
  return {
    url: urlOf(port, 'postgres'),
    port,
    folder,
    get pid() {
      return server.pid;
    },
    stop: async () => {
      if (!server.isRunning) await removeSharedMemory(folder);
      await server.stop();
    },
    kill: () => server.kill(),
    restart: () => server.restart(),
    createDatabase: async (name) => {
      await ask(urlOf(port, 'postgres'), `create database "${name.replaceAll('"', '""')}"`);
      return urlOf(port, name);
    },
  };
}

/** Removes what a killed server left in the system beside its files, and a restart would reuse. */
async function removeSharedMemory(folder: string): Promise<void> {
  const lines = readFileSync(join(folder, 'data', 'postmaster.pid'), 'utf8').split('\n');
  const id = /^\s*\d+\s+(\d+)/.exec(lines[6] ?? '')?.[1];
  if (id !== undefined) await run('ipcrm', ['-m', id]);
}

const urlOf = (port: number, database: string): string =>
  `postgres://${role}@127.0.0.1:${port}/${encodeURIComponent(database)}`;

function postgresFolder(): string {
  const folder = findProgram('postgresql');
  if (folder === undefined) throw new Error('postgresql is missing; npm test installs it');
  return folder;
}

/** Nothing that would point the server or its tools elsewhere. */
const environment = (): NodeJS.ProcessEnv => ({ PATH: process.env['PATH'], LC_ALL: 'C' });

async function ask(url: string, statement: string): Promise<void> {
  const client = new Client({ connectionString: url });
  await client.connect();
  try {
    await client.query(statement);
  } finally {
    await client.end();
  }
}

/** Who runs the server where the tests run as root, as which it refuses to run. */
function serverUser(): { readonly uid: number; readonly gid: number } | undefined {
  if (process.getuid?.() !== 0) return;
  const users = readFileSync('/etc/passwd', 'utf8')
    .split('\n')
    .map((line) => line.split(':'));
  for (const wanted of ['postgres', 'nobody']) {
    const [, , uid, gid] = users.find(([name]) => name === wanted) ?? [];
    if (uid !== undefined && gid !== undefined) return { uid: Number(uid), gid: Number(gid) };
  }
  throw new Error('postgres refuses root, and there is neither a user postgres nor nobody');
}
