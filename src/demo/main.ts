#!/usr/bin/env node
import { mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { runCommandLine } from '../cli/index.js';

/**
 * The demonstration: the solvent recovery column solved from its models to a verified front, by the
 * same command a user would type. Results go to a folder beside the checkout's sources.
 */
const job = fileURLToPath(new URL('./solvent-recovery-column.json', import.meta.url));
const results = 'demo-results';

const introduction = `
A solvent recovery column: two tray temperatures in cascade with reflux and steam flow, the
pressure, and two levels that only have to stay within their bands. Seven loops that push on each
other, as they stand today. Heddle now searches all their settings at once and verifies what it
finds on models the search never saw. The plant is invented; the way to it is what a real job takes:

  heddle solve src/demo/solvent-recovery-column.json --out ${results}/front.json \\
    --responses ${results}/responses
`;

process.stderr.write(`${introduction.trim()}\n\n`);
mkdirSync(results, { recursive: true });
process.exitCode = await runCommandLine([
  'solve',
  job,
  '--out',
  join(results, 'front.json'),
  '--responses',
  join(results, 'responses'),
  ...process.argv.slice(2),
]);
