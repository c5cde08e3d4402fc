import { parse } from 'csv-parse/sync';
import { stringify } from 'csv-stringify/sync';
import { writeXlsx } from 'hucre/xlsx';
import { beforeAll, describe, expect, it } from 'vitest';
import type { Grid } from '../../src/contract/index.js';
import { readGrid, readSpreadsheet, writeTemplate } from '../../src/spreadsheet/index.js';
import type { Loose } from '../documents.js';
import { changed, gridOfJob } from './spreadsheet-grids.js';
import { twinHeater } from './twin-heater.js';

let twin: Grid;

beforeAll(async () => {
  twin = await gridOfJob(twinHeater());
});

describe('an XLSX file', () => {
  it('gives formulas by their saved values, shown percentages as such, and no dates or failures', async () => {
    const cells = new Map<string, Loose>([
      ['1,3', { type: 'formula', formula: 'C2+100', formulaResult: 100 }],
      ['1,5', { type: 'number', value: 0.05, style: { numFmt: '0.0%' } }],
      ['2,1', { type: 'date', value: new Date('2020-03-01T00:00:00Z') }],
      ['2,2', { type: 'error', value: '#N/A' }],
      ['2,3', { type: 'formula', formula: 'B2*2' }],
    ]);
    const rows = [
      ['tag', 'unit', 'low', 'high', 'at', 'noise'],
      ['TI-1', 'degC', 0, null, 50, null],
      ['TI-2', null, null, null, 50, 0.1],
    ];
    const measurements = { name: 'measurements', rows, cells };
    const others = twin.sheets.filter(({ name }) => name !== 'measurements');
    const bytes = await writeXlsx({ sheets: [measurements, ...others] });
    const { grid, faults } = await readSpreadsheet(bytes);
    expect(grid?.sheets[0]?.rows[1]?.[3]).toBe(100);
    const found = faults.map(({ code, cell }) => `${code} ${cell}`);
    for (const fault of ['CELL_PERCENT F2', 'CELL_DATE B3', 'CELL_ERROR C3', 'CELL_FORMULA D3']) {
      expect(found).toContain(fault);
    }
  });

  it('takes a share that is shown as a percentage', async () => {
    const [first = { name: '', rows: [] }, ...others] = [...twin.sheets].sort((a) =>
      a.name === 'responses' ? -1 : 1,
    );
    const column = first.rows[0]?.indexOf('gain spread') ?? -1;
    const cells = new Map<string, Loose>([
      [`1,${column}`, { type: 'number', value: 0.07, style: { numFmt: '0%' } }],
    ]);
    const { document } = await readSpreadsheet(
      await writeXlsx({ sheets: [{ ...first, cells }, ...others] }),
    );
    expect(JSON.parse(document ?? '').unit.responses[0].spread).toEqual({ gain: 0.07 });
  });

  it('is refused for a hidden sheet by a name that counts, and warns of hidden rows', async () => {
    const sheets = twin.sheets.map((sheet) => ({ ...sheet, hidden: sheet.name === 'search' }));
    const hidden = await readSpreadsheet(await writeXlsx({ sheets }));
    expect(hidden.faults.map(({ code, sheet }) => `${code} ${sheet}`)).toEqual([
      'SHEET_HIDDEN search',
    ]);
    const rowDefs = new Map([[2, { hidden: true }]]);
    const filtered = twin.sheets.map((sheet) => ({ ...sheet, rowDefs }));
    const other = [...filtered, { name: 'choices', rows: [['a']], hidden: true }];
    const { document, warnings } = await readSpreadsheet(await writeXlsx({ sheets: other }));
    expect(document).not.toBeNull();
    expect(warnings.map(({ sheet }) => sheet)).toContain('loops');
  });

  it('warns at the cell', () => {
    const grid = changed(twin, {
      loops: (rows) => {
        const [, row = []] = rows;
        row[14] = -0.8;
      },
    });
    const { warnings, document } = readGrid(grid);
    expect(document).not.toBeNull();
    expect(
      warnings.map(({ sheet, cell, heading, subject }) => `${sheet}!${cell} ${heading} ${subject}`),
    ).toEqual(['loops!O2 gain TC-1']);
  });
});

/** The same file with another delimiter, and its cells changed. */
const withDelimiter = (
  text: string,
  delimiter: string,
  change = (cell: string): string => cell,
): string => {
  const records: string[][] = parse(text, {
    bom: true,
    relax_column_count: true,
    skip_empty_lines: false,
  });
  return stringify(
    records.map((row) => row.map(change)),
    { delimiter },
  );
};

describe('a CSV file', () => {
  const csv = async (): Promise<string> =>
    new TextDecoder().decode(await writeTemplate(undefined, 'csv'));
  const read = (text: string) => readSpreadsheet(new TextEncoder().encode(text));

  it('holds every sheet behind a row of its name, and names cells by the rows of the file', async () => {
    const text = await csv();
    const lines = text.split('\r\n');
    const row = lines.findIndex((line) => line.startsWith('FV-202,%'));
    const broken = text.replace('FV-202,%,0,100', 'FV-202,%,0,high');
    const { faults } = await read(broken);
    expect(faults.map(({ code, sheet, cell }) => `${code} ${sheet}!${cell}`)).toContain(
      `CELL_NUMBER actuators!D${row + 1}`,
    );
  });

  it('may have semicolons or tabs between its cells', async () => {
    const text = await csv();
    const { document } = await read(text);
    for (const delimiter of [';', '\t']) {
      expect((await read(withDelimiter(text, delimiter))).document).toBe(document);
    }
  });

  it('has decimal commas only where nothing else can be meant, and says so', async () => {
    const text = await csv();
    const { document } = await read(text);
    const commas = withDelimiter(text, ';', (cell) => cell.replace(/^(-?\d*)\.(\d+)$/, '$1,$2'));
    const { document: same, warnings } = await read(commas);
    expect(same).toBe(document);
    const problems = warnings.map(({ problem }) => problem);
    expect(problems).toEqual(['decimal commas are read as decimal points']);
    const codes = (await read(commas.replace('0,08', '0.08'))).faults.map(({ code }) => code);
    expect(new Set(codes)).toEqual(new Set(['CELL_COMMA']));
  });

  it('may have line breaks in its quotes, and is refused where the quotes do not match', async () => {
    const text = (await csv()).replace('Invented example: wash water heater', '"Wash\nwater"');
    expect((await read(text)).faults.map(({ code, cell }) => `${code} ${cell}`)).toEqual([
      'VALUE_TEXT B9'.replace('B9', `B${rowOf(text, '"Wash')}`),
    ]);
    expect((await read(`${await csv()}"`)).faults.map(({ code }) => code)).toEqual([
      'FILE_DAMAGED',
    ]);
  });

  const rowOf = (text: string, start: string): number =>
    text.split('\r\n').findIndex((line) => line.includes(start)) + 1;
});
