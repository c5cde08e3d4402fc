import { readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { type JobInput, readJob } from '../../src/contract/index.js';
import {
  readGrid,
  readSpreadsheet,
  writeSpreadsheet,
  writeTemplate,
} from '../../src/spreadsheet/index.js';
import { exampleJob, type Loose } from '../documents.js';
import '../properties.js';
import { generatedJob } from './generated-job.js';
import { gridOfJob, withPlainLimits } from './spreadsheet-grids.js';

const demo = (name: string): JobInput => JSON.parse(readFileSync(`src/demo/${name}.json`, 'utf8'));

/** The example with every part of the format that it leaves out, whether or not it can be computed yet. */
function fullJob(): JobInput {
  const job: Loose = exampleJob();
  const [, second] = job.unit.responses;
  second.spread.independent = true;
  job.unit.actuators[0].deadband = 0.3;
  job.unit.actuators[0].resolution = 0.1;
  job.unit.responses.splice(3, 0, {
    from: 'FV-111',
    to: 'PI-130',
    model: { kind: 'step-response', interval: 0.5, values: [0, 0.1, 0.25, 0.3], integrating: true },
  });
  job.loops[1].feedforward = [
    { from: 'FEED', gain: 1.2, lead: 2, lag: 6, deadTime: 0 },
    { from: { outputOf: 'TC-110' }, gain: -0.5 },
  ];
  job.loops[0].settingStep = { gain: 0.01 };
  job.search.objectives = ['speed', 'robustness'];
  job.search.upsetWeights = { setpoint: 0.1, disturbance: 2 };
  return job;
}

const read = async (bytes: Uint8Array): Promise<Loose> => {
  const { document, faults } = await readSpreadsheet(bytes);
  if (document === null) throw new Error(JSON.stringify(faults, null, 1));
  return JSON.parse(document);
};

describe('a job document that goes through a spreadsheet', () => {
  it.each(['solvent-recovery-column', 'machine-hall-cooling'])(
    'comes back whole: %s',
    async (name) => {
      const job = demo(name);
      expect(await read(await writeSpreadsheet(job))).toEqual(job);
      expect(await read(await writeSpreadsheet(job, 'csv'))).toEqual(job);
    },
  );

  it('comes back whole with cascades, operating points, a setpoint as a source, nominal limits', async () => {
    expect(await read(await writeSpreadsheet(exampleJob()))).toEqual(exampleJob());
    expect(await read(await writeSpreadsheet(exampleJob(), 'csv'))).toEqual(exampleJob());
  });

  it('says the same as the document even of what cannot be computed yet', async () => {
    const job = fullJob();
    const direct = readJob(JSON.stringify(job));
    const { faults } = await readSpreadsheet(await writeSpreadsheet(job));
    if (direct.ok) throw new Error('every part is available: this test may compare documents now');
    expect(faults.map(({ code, path }) => `${code} ${path}`)).toEqual(
      direct.faults.map(({ code, path }) => `${code} ${path}`),
    );
    for (const fault of faults) expect(fault.cell, JSON.stringify(fault)).not.toBeNull();
  });

  it('comes back whole, whatever it holds, and a second time as the same cells', async () => {
    await fc.assert(
      fc.asyncProperty(generatedJob, async (job) => {
        const grid = await gridOfJob(job);
        const { document } = readGrid(grid);
        const plain = JSON.parse(document ?? 'null');
        expect(plain).toEqual(JSON.parse(JSON.stringify(withPlainLimits(job))));
        expect(await gridOfJob(plain)).toEqual(grid);
      }),
      { numRuns: 60 },
    );
  });

  it('keeps tags and units that a spreadsheet would take for something else', async () => {
    const tags = [
      '=1+1',
      '-5',
      '+A1',
      '@x',
      "'quoted",
      '#REF!',
      '0012',
      '1e3',
      'TRUE',
      'sheet',
      '_x0041_',
    ];
    for (const tag of tags) {
      const job: Loose = exampleJob();
      job.unit.operatingPoints = [];
      job.unit.disturbances[0].tag = tag;
      job.unit.responses[5].from = tag;
      job.unit.measurements[0].unit = ' degC';
      job.unit.measurements[1].unit = '';
      delete job.unit.operatingPoints;
      expect(await read(await writeSpreadsheet(job)), tag).toEqual(job);
      expect(await read(await writeSpreadsheet(job, 'csv')), tag).toEqual(job);
    }
  });

  it('puts no formula into a CSV file', async () => {
    const job: Loose = exampleJob();
    job.unit.name = '=cmd|calc!A1';
    const text = new TextDecoder().decode(await writeSpreadsheet(job, 'csv'));
    const cells = text.split(/[,\r\n]/).filter((cell) => /^"?[=+@\t]/.test(cell));
    expect(cells).toEqual([]);
    expect(text).toContain("'=cmd|calc!A1");
  });
});

describe('the template', () => {
  it.each(['xlsx', 'csv'] as const)('checks clean as %s, without a warning', async (format) => {
    const { document, faults, warnings } = await readSpreadsheet(
      await writeTemplate(undefined, format),
    );
    expect(faults).toEqual([]);
    expect(warnings).toEqual([]);
    expect(readJob(document ?? '').ok).toBe(true);
  });

  it('can be made around a job that there is', async () => {
    const job = demo('machine-hall-cooling');
    expect(await read(await writeTemplate(job))).toEqual(job);
  });
});
