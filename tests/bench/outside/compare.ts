/**
 * Heddle's `evaluate` against a calculation written apart from it with numpy and scipy, on random units.
 * The Python beside this file knows the physics from its description alone; it prints the largest
 * disagreement of each figure.
 */
import { spawnSync } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { drawDocument } from '../../drawn/drawn-documents.js';
import type { Built } from '../built.js';
import { findPython } from './python.js';

/** As many as leave more than two hundred stable ones. */
const count = Number(process.env['HEDDLE_BENCH_UNITS'] ?? 280);

export async function run(built: Built): Promise<void> {
  const python = findPython();
  if (python === undefined) {
    process.exitCode = 1;
    return;
  }
  const cases = await evaluateDrawn(built);
  const folder = mkdtempSync(join(tmpdir(), 'heddle-outside-'));
  try {
    const file = join(folder, 'cases.json');
    writeFileSync(file, JSON.stringify(cases));
    const script = fileURLToPath(new URL('./compare.py', import.meta.url));
    // Matrices this small are only slowed by more threads than one.
    const env = { ...process.env, OPENBLAS_NUM_THREADS: '1' };
    const { status } = spawnSync(python, ['-B', script, file], { stdio: 'inherit', env });
    process.exitCode = status ?? 1;
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

async function evaluateDrawn(built: Built): Promise<{ job: unknown; evaluation: unknown }[]> {
  const { readJob } = await built<typeof import('../../../src/contract/index.js')>('contract');
  const { compileJob, evaluateSettings, prepareJob, Workbench } =
    await built<typeof import('../../../src/study/index.js')>('study');
  const provenance = { job: '0'.repeat(64), compute: 'bench' };
  return Array.from({ length: count }, (_, k) => {
    const document = drawDocument(k + 1);
    const read = readJob(JSON.stringify(document));
    if (!read.ok) throw new Error(`unit ${k + 1}: ${JSON.stringify(read.faults[0])}`);
    const compiled = compileJob(read.job);
    const bench = new Workbench(compiled, prepareJob(compiled));
    const { base } = compiled.space;
    const { responses: __, ...evaluation } = evaluateSettings(bench, base, provenance, []);
    if ((k + 1) % 20 === 0) process.stderr.write(`\revaluated ${k + 1} of ${count}`);
    return { job: read.job, evaluation };
  });
}
