/**
 * Runs a benchmark that is written in TypeScript: `node tests/bench/run.mjs outside/compare.ts`. It is
 * handed the built program to take from it what is timed, so that its figures are the program's own.
 */
import { fileURLToPath } from 'node:url';
import { runnerImport } from 'vite';

const [file = ''] = process.argv.slice(2);
const path = fileURLToPath(new URL(file, import.meta.url));
const options = {
  configFile: /** @type {const} */ (false),
  logLevel: /** @type {const} */ ('error'),
};
/** @type {{ module: { run: (built: import('./built.js').Built) => Promise<void> } }} */
const { module } = await runnerImport(path, options);
await module.run(
  (folder) => import(new URL(`../../dist/src/${folder}/index.js`, import.meta.url).href),
);
