import { type ChildProcess, fork } from 'node:child_process';
import { EventEmitter, once } from 'node:events';
import { fileURLToPath } from 'node:url';
import type { Order } from './keeper.mjs';
import { waitLimitMs, within } from './waiting.js';

const keeper = fileURLToPath(new URL('keeper.mjs', import.meta.url));

/** What a program wrote so far. */
export interface Written {
  readonly stdout: string;
  readonly stderr: string;
}

/**
 * A program that runs while a test wants it, and no longer than the test's own process. It has ended
 * when every process that shares its output has.
 */
export class KeptProcess {
  /** The exit code once it has ended; 128 + n after signal n. */
  readonly ended: Promise<number>;
  readonly written: Written;
  readonly #pid: Promise<number>;
  readonly #changes = new EventEmitter().setMaxListeners(0);
  #known = 0;
  #code: number | undefined;

  private constructor(child: ChildProcess) {
    const written = { stdout: '', stderr: '' };
    this.written = written;
    for (const name of ['stdout', 'stderr'] as const) {
      child[name]?.setEncoding('utf8').on('data', (text: string) => {
        written[name] += text;
        this.#changes.emit('change');
      });
    }
    this.#pid = new Promise((resolve, reject) => {
      child.once('message', (told: { readonly pid?: number; readonly fault?: string }) => {
        if (told.pid === undefined) reject(new Error(`the program did not start: ${told.fault}`));
        else resolve(told.pid);
      });
      child.once('error', reject);
      child.once('close', () => reject(new Error('the keeper of a program ended early')));
    });
    this.ended = new Promise((resolve) => {
      child.once('close', (code) => {
        this.#code = code ?? 1;
        this.#changes.emit('change');
        resolve(this.#code);
      });
    });
  }

  /** Starts a program; it runs, but may not be ready, when this returns. */
  static async start(order: Order): Promise<KeptProcess> {
    const child = fork(keeper, [], {
      detached: true,
      execArgv: [],
      stdio: ['ignore', 'pipe', 'pipe', 'ipc'],
    });
    const kept = new KeptProcess(child);
    child.send(order);
    kept.#known = await kept.#pid;
    return kept;
  }

  /** Process id of the program itself. */
  get pid(): number {
    return this.#known;
  }

  get isRunning(): boolean {
    return this.#code === undefined;
  }

  /**
   * Waits until the program has written something, and answers with the match.
   * @throws {Error} with all it wrote, where it ended before or the limit has passed
   */
  async said(pattern: RegExp, limitMs = waitLimitMs): Promise<RegExpExecArray> {
    const seek = async (): Promise<RegExpExecArray> => {
      for (;;) {
        const match = pattern.exec(this.written.stdout) ?? pattern.exec(this.written.stderr);
        if (match) return match;
        if (!this.isRunning) {
          throw new Error(`ended with ${this.#code} before it said ${pattern}:\n${this.story}`);
        }
        await once(this.#changes, 'change');
      }
    };
    return within(seek(), () => `${pattern} in what it said:\n${this.story}\nIt`, limitMs);
  }

  /** Sends a signal to the program, where it still runs. */
  send(signal: NodeJS.Signals): void {
    if (!this.isRunning) return;
    try {
      process.kill(this.pid, signal);
    } catch (error) {
      if ((error as NodeJS.ErrnoException).code !== 'ESRCH') throw error;
    }
  }

  /** Asks the program to stop and waits until it is gone. */
  async stop(signal: NodeJS.Signals = 'SIGTERM'): Promise<number> {
    this.send(signal);
    return within(this.ended, () => `an end after ${signal}; it said:\n${this.story}\nIt`);
  }

  /** Ends the program as a power cut would, and waits until it is gone. */
  kill(): Promise<number> {
    return this.stop('SIGKILL');
  }

  /** All it wrote. */
  get story(): string {
    return `${this.written.stdout}${this.written.stderr}`;
  }
}
