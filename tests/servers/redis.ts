import { once } from 'node:events';
import { connect } from 'node:net';
import { findProgram } from '../../src/bootstrap/programs.mjs';
import { makeServerFolder } from './folders.js';
import { OwnServer } from './own-server.js';

export interface RedisOptions {
  /** Write every command to a file before it is answered, so that a killed server loses nothing. */
  readonly appendOnly?: boolean;
}

/** A Redis server of a test's own. */
export interface RedisServer {
  /** redis://127.0.0.1:port, the same over restarts. */
  readonly url: string;
  readonly port: number;
  /** Process id of the server; another one after a restart. */
  readonly pid: number;
  /** Its files, gone once it is stopped. */
  readonly folder: string;
  /** Ends it for good and removes its files. */
  stop(): Promise<void>;
  /** kill -9; what the append-only file holds stays. */
  kill(): Promise<void>;
  /** Starts it again on its files, stopping it first where it runs. */
  restart(): Promise<void>;
  /** Forgets everything. */
  flush(): Promise<void>;
}

/** Starts a Redis server on a free port of the loopback interface. */
export async function startRedis({ appendOnly = false }: RedisOptions = {}): Promise<RedisServer> {
  const program = findProgram('redis-server');
  if (program === undefined) throw new Error('redis-server is missing; npm test installs it');
  const folder = makeServerFolder();
  const settings = {
    bind: '127.0.0.1',
    dir: folder,
    save: '',
    appendonly: appendOnly ? 'yes' : 'no',
    appendfsync: 'no',
    'maxmemory-policy': 'noeviction',
    daemonize: 'no',
  };
  const parameters = Object.entries(settings).flatMap(([name, value]) => [`--${name}`, value]);
  const server = await OwnServer.start({
    folder,
    program,
    parameters: (port) => ['--port', String(port), ...parameters],
    environment: { PATH: process.env['PATH'], LC_ALL: 'C' },
    listening: /Ready to accept connections/,
    greet: async (port) => expectAnswer(port, 'PING', '+PONG'),
    stopSignal: 'SIGTERM',
    lastSignal: 'SIGKILL',
  });
  return {
    url: `redis://127.0.0.1:${server.port}`,
    port: server.port,
    folder,
    get pid() {
      return server.pid;
    },
    stop: () => server.stop(),
    kill: () => server.kill(),
    restart: () => server.restart(),
    flush: () => expectAnswer(server.port, 'FLUSHALL', '+OK'),
  };
}

async function expectAnswer(port: number, command: string, wanted: string): Promise<void> {
  const socket = connect(port, '127.0.0.1').setEncoding('utf8');
  try {
    socket.write(`${command}\r\n`);
    const [answer] = (await once(socket, 'data')) as [string];
    if (answer.trimEnd() !== wanted) throw new Error(`Redis answered ${command} with ${answer}`);
  } finally {
    socket.destroy();
  }
}
