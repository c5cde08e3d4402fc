import { entry, plainEnvironment } from '../service/built-program.js';
import { checkout } from '../service/scratch.js';
import { KeptProcess } from './kept-process.js';
import { untilTrue } from './waiting.js';

/**
 * Starts the built program (`build()` makes it), with no option set by the surroundings. It runs,
 * but may not be ready, when this returns; it goes with the test's process at the latest.
 */
export function startProgram(
  parameters: readonly string[],
  environment: NodeJS.ProcessEnv = {},
  folder = checkout,
): Promise<KeptProcess> {
  return KeptProcess.start({
    program: process.execPath,
    parameters: [entry, ...parameters],
    workingFolder: folder,
    environment: { ...plainEnvironment(), ...environment },
    lastSignal: 'SIGKILL',
  });
}

/**
 * Waits until a program answers a URL with success.
 * @throws {Error} with all it wrote, where it has ended or the limit has passed
 */
export async function untilServes(program: KeptProcess, url: string): Promise<void> {
  await untilTrue(
    async () => {
      if (!program.isRunning) throw new Error(`ended before it served ${url}:\n${program.story}`);
      const response = await fetch(url).catch(() => undefined);
      await response?.body?.cancel();
      return response?.ok ?? false;
    },
    () => `success at ${url}, served by what said\n${program.story}\nIt`,
  );
}
