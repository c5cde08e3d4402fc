import { beforeAll, describe, expect, it } from 'vitest';
import { z } from 'zod';
import {
  type Grid,
  type GridCell,
  gridSchema,
  jobSchema,
  spreadsheetFaultCodes,
} from '../../src/contract/index.js';
import { readGrid, writeSpreadsheet } from '../../src/spreadsheet/index.js';
import { exampleJob, type Loose } from '../documents.js';
import { changed, documentOf, gridOfJob } from './spreadsheet-grids.js';
import { twinHeater } from './twin-heater.js';

let twin: Grid;

beforeAll(async () => {
  twin = await gridOfJob(twinHeater());
});

const codesOf = (grid: Grid): readonly string[] =>
  readGrid(grid).faults.map(
    ({ code, sheet, cell }) => `${code} ${cell === null ? sheet : `${sheet}!${cell}`}`,
  );

/** Every key of a document by its path, lists and alternatives left out of it. */
function keysOf(schema: Loose, path: readonly string[] = []): readonly string[] {
  const parts = [...(schema.anyOf ?? []), ...(schema.oneOf ?? []), ...(schema.allOf ?? [])];
  if (schema.items !== undefined) parts.push(schema.items);
  const own = Object.entries<Loose>(schema.properties ?? {}).map(([key, inner]) =>
    keysOf(inner, [...path, key]),
  );
  const found = [...own, ...parts.map((inner) => keysOf(inner, path))].flat();
  return found.length === 0 ? [path.join('.')] : [...new Set(found)];
}

describe('the layout', () => {
  it('has a heading for every key that a document has', async () => {
    const schema = z.toJSONSchema(jobSchema, { io: 'input', unrepresentable: 'any' });
    const keys = keysOf(schema).filter(
      (key) => key !== 'format' && !key.startsWith('unit.operatingPoints.responses.'),
    );
    expect(keys.length).toBeGreaterThan(100);
    const full = fullest();
    const grid = await gridOfJob(full);
    // A limit's `nominal` is said by its heading, and a source by which heading it stands under.
    const said = keys.filter((key) => !key.endsWith('.nominal'));
    const missing = said.filter((key) => !isStated(full, key.split('.')));
    expect(missing).toEqual([]);
    const cellsOf = async (job: Loose): Promise<string> =>
      new TextDecoder().decode(await writeSpreadsheet(job, 'csv'));
    const cells = await cellsOf(full);
    for (const key of said) {
      const without = structuredClone(full);
      removeAll(without, key.split('.'));
      expect(await cellsOf(without), key).not.toBe(cells);
    }
    const { faults } = readGrid(grid);
    expect(faults.filter(({ code }) => code in spreadsheetFaultCodes)).toEqual([]);
  }, 60_000);

  it('takes headings in any order, case and spelling of blanks, with remarks among them', () => {
    const turned = changed(twin, {
      loops: (rows) => {
        for (const row of rows) row.reverse();
        const [head = []] = rows;
        for (const [column, cell] of head.entries()) {
          head[column] = String(cell)
            .toUpperCase()
            .replaceAll(' ', column % 2 === 0 ? '_' : '-');
        }
        for (const [index, row] of rows.entries()) row.unshift(index === 0 ? 'Notes' : 'why not');
        rows.splice(1, 0, [null], [' ']);
      },
      Notes: (rows) => rows.push(['whatever', 1]),
    });
    expect(documentOf(turned)).toEqual(documentOf(twin));
  });

  it('takes the keys of the document as they are written there', () => {
    const spelt = changed(twin, {
      loops: ([head = []]) => {
        for (const [column, cell] of head.entries()) {
          head[column] = String(cell).replace(/ ([a-z])/g, (_, letter) => letter.toUpperCase());
        }
      },
    });
    expect(documentOf(spelt)).toEqual(documentOf(twin));
  });

  it('takes responses as matrices: numbers by kind, several in a cell, or both', () => {
    const { unit } = documentOf(twin);
    const matrices = changed(twin, {
      responses: null,
      'response matrix': (rows) =>
        rows.push(
          ['gain', 'FV-1', 'FV-2'],
          ['TI-1', 0.9, '0.4'],
          ['TI-2', 0.3, 1.1],
          [],
          ['time constant [min]', 'FV-1', 'FV-2'],
          ['TI-1', 8, 11],
          ['TI-2', 10, 7],
          [],
          ['dead time', 'FV-1', 'FV-2'],
          ['TI-1', 2, 3],
          ['TI-2', 4, 1.5],
        ),
    });
    expect(documentOf(matrices).unit.responses).toEqual(unit.responses);
    const cells = changed(twin, {
      responses: null,
      'Response Matrix': (rows) =>
        rows.push(
          ['gain; time constant; dead time', 'FV-1', 'FV-2'],
          ['TI-1', '0.9; 8; 2', '0.4;11;3'],
          [],
          ['gain; time constant; dead time', 'FV-1', 'FV-2'],
          ['TI-2', ' 0.3 ; 10 ; 4', '1.1; 7; 1.5'],
        ),
    });
    expect(documentOf(cells).unit.responses).toEqual(unit.responses);
    const both = changed(twin, {
      responses: (rows) => rows.splice(3),
      'response matrix': (rows) =>
        rows.push(
          ['gain; time constant; dead time', 'FV-1', 'FV-2'],
          ['TI-2', '0.3; 10; 4', '1.1; 7; 1.5'],
        ),
    });
    expect(documentOf(both).unit.responses).toEqual(unit.responses);
  });

  it('tells the kind of a response from what is filled in', () => {
    const kinds = changed(twin, {
      responses: null,
      disturbances: (rows) => rows.push(['D', 't/h', 1], ['E', 't/h', 1], ['F', 't/h', 1]),
      'response matrix': (rows) =>
        rows.push(
          ['gain; time constant; dead time', 'FV-1', 'FV-2', 'D'],
          ['TI-1', '0.9; 8; 2', '0.4; 11; 3', '1; 2'],
          ['TI-2', '0.3; 10; 4', '1.1; 7; 1.5'],
          [],
          ['second time constant', 'FV-1'],
          ['TI-1', 3],
          [],
          ['rate; time constant', 'E'],
          ['TI-1', '0.5; '],
          [],
          ['gain; period; damping; gain spread', 'F'],
          ['TI-2', '0.5; 4; 0.8; 20 %'],
        ),
    });
    const models = documentOf(kinds).unit.responses;
    expect(models[0].model).toEqual({
      kind: 'second-order',
      gain: 0.9,
      timeConstants: [8, 3],
      deadTime: 2,
    });
    expect(models[2].model).toEqual({ kind: 'first-order', gain: 1, timeConstant: 2 });
    expect(models[5].model).toEqual({ kind: 'integrating', rate: 0.5 });
    expect(models[6].model).toEqual({ kind: 'second-order', gain: 0.5, period: 4, damping: 0.8 });
    expect(models[6].spread).toEqual({ gain: 0.2 });
  });

  it('shows a fault of a matrix at the cell of the number, and of a tag at the tag', () => {
    const matrix = (
      cell: GridCell,
      from: GridCell = 'FV-2',
      corner: GridCell = 'gain; time constant; dead time',
    ) =>
      changed(twin, {
        responses: null,
        'response matrix': (rows) =>
          rows.push(
            [corner, 'FV-1', from],
            ['TI-1', '0.9; 8; 2', '0.4; 11; 3'],
            ['TI-2', '0.3; 10; 4', cell],
          ),
      });
    expect(codesOf(matrix('1.1; -7; 1.5'))).toEqual(['VALUE_RANGE response matrix!C3']);
    expect(codesOf(matrix('1.1; ; 1.5'))).toEqual(['HEADING_MISSING response matrix']);
    expect(codesOf(matrix('1.1; 7; 1.5; 3'))).toContain('CELL_PARTS response matrix!C3');
    expect(codesOf(matrix('1,1; 7; 1.5'))).toEqual(['CELL_COMMA response matrix!C3']);
    expect(codesOf(matrix('1.1; 7; 1.5', 'FV-9'))).toContain(
      'REFERENCE_UNKNOWN response matrix!C1',
    );
    expect(codesOf(matrix('1.1; 7; 1.5', null))).toContain('CELL_STRAY response matrix!C2');
    expect(codesOf(matrix('1.1; 7', 'FV-2', 'gain; lag'))).toContain(
      'HEADING_UNKNOWN response matrix!A1',
    );
    expect(codesOf(matrix('1.1; 7; 1', 'FV-1'))).toContain('CELL_CONFLICT response matrix!C2');
  });
});

describe('a grid as a message', () => {
  it('holds numbers, texts and nothing, in bounds', () => {
    expect(gridSchema.safeParse(twin).success).toBe(true);
    expect(gridSchema.safeParse({ sheets: [{ name: 'loops', rows: [[true]] }] }).success).toBe(
      false,
    );
    expect(
      gridSchema.safeParse({ sheets: [{ name: 'loops', rows: [['x'.repeat(40_000)]] }] }).success,
    ).toBe(false);
  });
});

/** Takes a key out wherever it stands; a list stays, without entries, and a text becomes another. */
function removeAll(entry: Loose, path: readonly string[]): void {
  const [key = '', ...rest] = path;
  if (Array.isArray(entry)) for (const one of entry) removeAll(one, path);
  else if (typeof entry !== 'object' || entry === null) return;
  else if (rest.length > 0) removeAll(entry[key], rest);
  else if (Array.isArray(entry[key])) entry[key] = [];
  else if (typeof entry[key] === 'string') entry[key] = `${entry[key]} other`;
  else delete entry[key];
}

function isStated(entry: Loose, path: readonly string[]): boolean {
  const [key, ...rest] = path;
  if (key === undefined) return entry !== undefined;
  if (Array.isArray(entry)) return entry.some((one) => isStated(one, path));
  if (typeof entry !== 'object' || entry === null) return false;
  return isStated(entry[key], rest);
}

/** A job with a value for every key of the format, sensible together or not. */
function fullest(): Loose {
  const job: Loose = exampleJob();
  const limits = Object.fromEntries(
    [
      'overshoot',
      'settlingTime',
      'peakDeviation',
      'peakSensitivity',
      'outputNoise',
      'outputRate',
      'outputMove',
      'travel',
      'upsetToOthers',
      'levelBand',
    ].map((name) => [name, { max: 2, nominal: true }]),
  );
  const four = (value: unknown) => ({
    gain: value,
    integral: value,
    derivative: value,
    filter: value,
  });
  const [loop] = job.loops;
  Object.assign(loop, {
    settingStep: four(0.1),
    bounds: four([0.1, 5]),
    maxChange: 3,
    tolerance: 1,
    weight: 1,
    setpointStep: 1,
    loadStep: 1,
    outputLow: 0,
    outputHigh: 10,
    action: 'reverse',
    goal: 'tight',
    feedforward: [{ from: { outputOf: 'FC-111' }, gain: 1, lead: 1, lag: 1, deadTime: 1 }],
    limits: {
      ...limits,
      gainMargin: { min: 2, nominal: true },
      phaseMargin: { min: 30, nominal: true },
    },
  });
  Object.assign(loop.controller, {
    form: 'ideal',
    gainIn: 'percent',
    integralIn: 'time',
    derivativeIn: 'time',
    setpointWeight: 1,
    derivativeOn: 'error',
    derivativeGain: 10,
    filterOrder: 2,
  });
  Object.assign(job.unit.actuators[0], { deadband: 1, resolution: 1 });
  job.unit.responses[1].spread.independent = true;
  job.unit.responses[1].model.lead = 1;
  job.unit.responses.push(
    {
      from: 'LV-120',
      to: 'PI-130',
      model: { kind: 'step-response', interval: 1, values: [0, 1], integrating: true, deadTime: 1 },
    },
    {
      from: 'LV-120',
      to: 'TI-110',
      model: { kind: 'transfer-function', numerator: [1], denominator: [2, 1], deadTime: 1 },
    },
    {
      from: 'PV-130',
      to: 'LI-120',
      model: { kind: 'integrating', rate: 1, timeConstant: 1, lead: 1, deadTime: 1 },
    },
  );
  job.unitLimits = {
    anySingleLoopInManual: true,
    peakSingularValueS: { max: 2, nominal: true },
    peakSingularValueT: { max: 2, nominal: true },
  };
  job.search = {
    objectives: ['speed', 'robustness'],
    alternatives: 5,
    effort: 'deep',
    models: 4,
    seed: 2,
    timeBudget: 60,
    upsetWeights: { setpoint: 1, load: 1, disturbance: 1 },
  };
  return job;
}
