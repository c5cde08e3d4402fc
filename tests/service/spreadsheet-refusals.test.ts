import { readdirSync, readFileSync } from 'node:fs';
import { join } from 'node:path';
import { beforeAll, describe, expect, it } from 'vitest';
import {
  describeCellFault,
  type Grid,
  type GridCell,
  spreadsheetFaultCodes,
} from '../../src/contract/index.js';
import { readGrid } from '../../src/spreadsheet/index.js';
import { changed, faultsOf, gridOfJob } from './spreadsheet-grids.js';
import { twinHeater } from './twin-heater.js';

let twin: Grid;

beforeAll(async () => {
  twin = await gridOfJob(twinHeater());
});

const codesOf = (grid: Grid): readonly string[] =>
  readGrid(grid).faults.map(
    ({ code, sheet, cell }) => `${code} ${cell === null ? sheet : `${sheet}!${cell}`}`,
  );

describe('a sheet is refused where it does not say what it means', () => {
  const set = (sheet: string, row: number, column: number, cell: GridCell) => (grid: Grid) =>
    changed(grid, {
      [sheet]: (rows) => {
        const target = rows[row];
        if (target !== undefined) target[column] = cell;
      },
    });

  it.each([
    [
      'an unknown sheet',
      'SHEET_UNKNOWN measurments',
      (g: Grid) => changed(g, { measurments: (r) => r.push(['tag']) }),
    ],
    [
      'a sheet twice',
      'SHEET_DUPLICATE LOOPS',
      (g: Grid) => changed(g, { LOOPS: (r) => r.push(['tag']) }),
    ],
    ['no loops', 'SHEET_MISSING loops', (g: Grid) => changed(g, { loops: null })],
    ['no unit', 'HEADING_MISSING unit', (g: Grid) => changed(g, { unit: null })],
    ['an unknown heading', 'HEADING_UNKNOWN measurements!G1', set('measurements', 0, 6, 'hihg')],
    ['a heading twice', 'HEADING_DUPLICATE measurements!G1', set('measurements', 0, 6, 'High')],
    [
      'an unknown key',
      'HEADING_UNKNOWN search!A6',
      (g: Grid) => changed(g, { search: (r) => r.push(['sed', 1]) }),
    ],
    [
      'a key twice',
      'HEADING_DUPLICATE search!B6',
      (g: Grid) => changed(g, { search: (r) => r.push(['seed', 1]) }),
    ],
    ['a value behind a key', 'CELL_STRAY unit!D2', set('unit', 1, 3, 5)],
    ['a value without a heading', 'CELL_STRAY measurements!H2', set('measurements', 1, 7, 5)],
    ['a time unit that is another', 'HEADING_UNIT unit!B4', set('unit', 3, 0, 'horizon (s)')],
    [
      'a percentage where none is meant',
      'CELL_PERCENT measurements!D2',
      set('measurements', 1, 3, '100%'),
    ],
    ['a decimal comma', 'CELL_COMMA measurements!D2', set('measurements', 1, 3, '100,5')],
    ['thousands', 'CELL_COMMA measurements!D2', set('measurements', 1, 3, '1.100,5')],
    [
      'a number with its unit',
      'CELL_NUMBER measurements!D2',
      set('measurements', 1, 3, '100 degC'),
    ],
    ['a number that is none', 'CELL_NUMBER measurements!D2', set('measurements', 1, 3, '1e999')],
    [
      'a formula without its value',
      'CELL_FORMULA measurements!D2',
      set('measurements', 1, 3, '=B2'),
    ],
    ['neither yes nor no', 'CELL_YES_NO unit limits!B2', set('unit limits', 1, 1, 'perhaps')],
    ['two things driven', 'CELL_CONFLICT loops!D2', set('loops', 1, 3, 'TC-2')],
    [
      'a lag too many',
      'KEY_UNKNOWN responses!G2',
      (g: Grid) => set('responses', 1, 2, 'first order')(set('responses', 1, 6, 4)(g)),
    ],
    [
      'feedforward of no loop',
      'REFERENCE_UNKNOWN feedforward!A2',
      (g: Grid) =>
        changed(g, { feedforward: (r) => r.push(['loop', 'from', 'gain'], ['TC-9', 'D', 1]) }),
    ],
    [
      'steps of no response',
      'SHEET_MISSING step responses!B1',
      (g: Grid) =>
        changed(g, {
          'step responses': (r) =>
            r.push(['from', 'FV-1'], ['to', 'TI-1'], ['values', 1], [null, 2]) === 0 ||
            r[0]?.splice(1, 1, 'FV-7'),
        }),
    ],
    [
      'steps without values',
      'HEADING_MISSING step responses',
      (g: Grid) =>
        changed(g, { 'step responses': (r) => r.push(['from', 'FV-1'], ['to', 'TI-1']) }),
    ],
  ])('%s', (_, fault, edit) => {
    expect(codesOf(edit(twin))).toContain(fault);
  });

  it('a step response has each of its values at its cell', () => {
    const steps = (values: readonly GridCell[]) =>
      changed(twin, {
        responses: (rows) => {
          const [head = [], row = []] = rows;
          head.push('interval');
          row[2] = 'step-response';
          for (let column = 3; column < head.length - 1; column += 1) row[column] = null;
          row[head.length - 1] = 0.5;
        },
        'step responses': (rows) =>
          rows.push(
            ['from', 'FV-1'],
            ['to', 'TI-1'],
            ...values.map((value, k) => [k === 0 ? 'values' : null, value]),
          ),
      });
    expect(codesOf(steps([0, 0.2, 'x']))).toContain('CELL_NUMBER step responses!B5');
    expect(codesOf(steps([0, null, 0.2]))).toContain('CELL_EMPTY step responses!B4');
    expect(codesOf(steps([0, 1e70, 0.2]))).toContain(
      'VALUE_RANGE step responses!B4'.replace('VALUE_RANGE', 'VALUE_TYPE'),
    );
    expect(codesOf(steps([0]))).toContain('LIST_LENGTH step responses!B3');
  });

  it('says so in one line, with cell, entry, heading, value and what is allowed', () => {
    const grid = set('loops', 1, 14, 'ten')(twin);
    const [fault] = readGrid(grid).faults;
    if (fault === undefined) throw new Error('no fault');
    expect(describeCellFault(fault)).toBe(
      'loops!O2 (TC-1, gain): not a number; found "ten"; allowed: a number, without its unit, as in 12.5',
    );
  });

  it('asks for a heading that is missing once, not once a row', () => {
    const grid = changed(twin, {
      loops: (rows) => {
        for (const row of rows) row.splice(12, 1);
      },
    });
    expect(faultsOf(grid)).toEqual(['HEADING_MISSING loops scan']);
  });
});

describe('the catalogue of what can be wrong', () => {
  const sources = readdirSync('src/spreadsheet', { recursive: true, encoding: 'utf8' })
    .filter((path) => path.endsWith('.ts'))
    .map((path) => readFileSync(join('src/spreadsheet', path), 'utf8'))
    .join('\n');

  it.each(Object.keys(spreadsheetFaultCodes))('holds %s because something reports it', (code) => {
    expect(sources).toContain(`'${code}'`);
  });
});
