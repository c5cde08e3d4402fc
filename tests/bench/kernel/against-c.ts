/**
 * Steps a second of the search's kernel against a plain C loop of the same arithmetic, gcc -O3, the two
 * taking turns in one run. Processor time, so that others on the machine do not count.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import type { Built } from '../built.js';
import { type DrawnSetup, drawSetup } from './drawn-setup.js';

const turns = 7;
/** s of processor time, about, that one turn takes. */
const turnTime = 0.15;

type Simulation = typeof import('../../../src/simulation/index.js');

export async function run(built: Built): Promise<void> {
  const simulation = await built<Simulation>('simulation');
  const folder = mkdtempSync(join(tmpdir(), 'heddle-kernel-'));
  try {
    const program = join(folder, 'loop');
    const source = fileURLToPath(new URL('./loop.c', import.meta.url));
    const compiled = spawnSync('gcc', ['-O3', '-o', program, source, '-lm'], { stdio: 'inherit' });
    if (compiled.error !== undefined || compiled.status !== 0) {
      process.stderr.write(
        'this comparison needs a C compiler; on Debian: sudo apt-get install gcc\n',
      );
      process.exitCode = 1;
      return;
    }
    const rows = [2, 8, 32].flatMap((count) =>
      [1, 0.2].map((share) => {
        const drawn = drawSetup(count, share);
        const figures = compare(simulation, program, join(folder, 'unit'), drawn);
        return { loops: count, filled: share === 1 ? 'dense' : '20 %', ...figures };
      }),
    );
    console.table(rows);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

function compare(
  { ScalarKernel }: Simulation,
  program: string,
  file: string,
  { setup, controllers, numbers }: DrawnSetup,
) {
  writeFileSync(file, new Uint8Array(numbers.buffer));
  const kernel = new ScalarKernel(setup);
  const upsets = setup.upsets.map((_, u) => u);
  const runHere = (repeats: number): { seconds: number; figures: number[] } => {
    const candidates = Array.from({ length: repeats }, () => controllers);
    const before = process.cpuUsage();
    const all = kernel.simulate(candidates, [0], upsets);
    const { user, system } = process.cpuUsage(before);
    const figures = Array.from(all.subarray(0, all.length / repeats));
    return { seconds: (user + system) / 1e6, figures };
  };
  const runThere = (repeats: number): { seconds: number; figures: number[] } => {
    const { stdout } = spawnSync(program, [file, String(repeats)], {
      encoding: 'utf8',
      maxBuffer: 1e8,
    });
    const [seconds = 0, ...figures] = stdout.trim().split('\n').map(Number);
    return { seconds, figures };
  };
  // The first runs are for the compiler of the one, and say how many repeats make a turn of each.
  let repeats = 1;
  while (runHere(repeats).seconds < turnTime) repeats *= 2;
  let repeatsThere = repeats;
  while (runThere(repeatsThere).seconds < turnTime) repeatsThere *= 2;
  const steps = upsets.length * (setup.steps + 1);
  const rates = Array.from({ length: turns }, () => {
    const here = (repeats * steps) / runHere(repeats).seconds;
    const there = (repeatsThere * steps) / runThere(repeatsThere).seconds;
    return { here, there, ratio: here / there };
  });
  const middle = (key: 'here' | 'there' | 'ratio'): number =>
    rates.map((r) => r[key]).sort((a, b) => a - b)[Math.floor(turns / 2)] as number;
  const there = runThere(1).figures;
  const off = runHere(1).figures.map((x, i) => distance(x, there[i] ?? Number.NaN));
  return {
    'million steps/s': Number((middle('here') / 1e6).toPrecision(3)),
    'of C': Number((middle('there') / 1e6).toPrecision(3)),
    ratio: Number(middle('ratio').toFixed(2)),
    'largest difference': Number(Math.max(...off).toExponential(1)),
  };
}

/** As a share; equal infinities do not differ. */
const distance = (a: number, b: number): number =>
  a === b ? 0 : Math.abs(a - b) / Math.max(Math.abs(a), Math.abs(b));
