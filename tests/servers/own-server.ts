import { rmSync } from 'node:fs';
import type { Order } from './keeper.mjs';
import { KeptProcess } from './kept-process.js';
import { freePort } from './ports.js';

/** How one kind of server is run. */
export interface ServerKind {
  /** Its folder, which goes with it. */
  readonly folder: string;
  readonly user?: { readonly uid: number; readonly gid: number };
  readonly program: string;
  readonly parameters: (port: number) => readonly string[];
  readonly environment: NodeJS.ProcessEnv;
  /** What it writes when it listens. */
  readonly listening: RegExp;
  /** Refuses where the server does not answer a client. */
  readonly greet: (port: number) => Promise<void>;
  /** Asks for a quick but orderly end. */
  readonly stopSignal: NodeJS.Signals;
  /** Ends it without regard for its data, and with all it has started. */
  readonly lastSignal: NodeJS.Signals;
}

const portInUse = /Address already in use/;
const portAttempts = 5;

/**
 * A server of a test's own, on the loopback interface and a port that stays the same over restarts.
 * It is running, down (killed, its data kept), or stopped for good, its folder removed.
 */
export class OwnServer {
  readonly #kind: ServerKind;
  #process: KeptProcess;
  readonly port: number;

  private constructor(kind: ServerKind, port: number, process: KeptProcess) {
    this.#kind = kind;
    this.port = port;
    this.#process = process;
  }

  /** Starts a server, and answers when it does. Its folder is removed where it cannot start. */
  static async start(kind: ServerKind): Promise<OwnServer> {
    try {
      for (let attempt = 1; ; attempt++) {
        const port = await freePort();
        try {
          return new OwnServer(kind, port, await launch(kind, port));
        } catch (error) {
          // Somebody took the port between our look and the server's.
          const isTaken = error instanceof Error && portInUse.test(error.message);
          if (!isTaken || attempt === portAttempts) throw error;
        }
      }
    } catch (error) {
      rmSync(kind.folder, { recursive: true, force: true });
      throw error;
    }
  }

  get pid(): number {
    return this.#process.pid;
  }

  get isRunning(): boolean {
    return this.#process.isRunning;
  }

  /** Ends it as a power cut of the process would; its data stay for a restart. */
  async kill(): Promise<void> {
    await this.#process.kill();
  }

  /** Starts it again on its data, stopping it first where it runs. */
  async restart(): Promise<void> {
    await this.#process.stop(this.#kind.stopSignal);
    this.#process = await launch(this.#kind, this.port);
  }

  /** Ends it for good and removes its folder. */
  async stop(): Promise<void> {
    await this.#process.stop(this.#kind.lastSignal);
    rmSync(this.#kind.folder, { recursive: true, force: true });
  }
}

async function launch(kind: ServerKind, port: number): Promise<KeptProcess> {
  const { program, folder, environment, lastSignal, user } = kind;
  const order: Order = {
    program,
    parameters: kind.parameters(port),
    workingFolder: folder,
    environment,
    lastSignal,
    folder,
    ...(user && { user }),
  };
  const process = await KeptProcess.start(order);
  try {
    await process.said(kind.listening);
    await kind.greet(port);
    return process;
  } catch (error) {
    await process.stop(lastSignal);
    throw error;
  }
}
