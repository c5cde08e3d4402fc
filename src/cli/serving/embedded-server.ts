import { availableParallelism } from 'node:os';
import { resolve } from 'node:path';
import { refusingCoded } from './serving-refusals.js';
import { type RunningServer, startServer } from './start-server.js';
import { stopStuck } from './stuck.js';

/** Room that must be left in the folder to accept anything, bytes. */
const floor = 256 * 2 ** 20;
const lockSeconds = 10;

/**
 * A server of this process alone, its record in a folder, on the loopback address.
 * @throws {Refusal} where the folder or the port cannot be had
 */
export function startEmbeddedServer(folder: string, port: number): Promise<RunningServer> {
  return refusingCoded(() =>
    startServer({
      place: { kind: 'embedded', folder: resolve(folder), floor, onStuck: stopStuck },
      host: '127.0.0.1',
      port,
      threads: availableParallelism(),
      lockSeconds,
      allowedHosts: [],
    }),
  );
}
