import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { pathToFileURL } from 'node:url';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { type Calculations, startCalculations } from '../../src/compute/index.js';
import { spreadsheetReadingSchema } from '../../src/contract/index.js';
import { readSpreadsheet, writeSpreadsheet } from '../../src/spreadsheet/index.js';
import type { Loose } from '../documents.js';
import { build, heddle } from './built-program.js';
import { checkout, Scratch } from './scratch.js';
import { singleLoop } from './single-loop.js';

const scratch = new Scratch();
const here = (name: string): string => join(scratch.folder, name);

beforeAll(async () => {
  build();
  writeFileSync(here('unit.xlsx'), await writeSpreadsheet(singleLoop()));
  writeFileSync(here('unit.csv'), await writeSpreadsheet(singleLoop(), 'csv'));
  writeFileSync(here('unit.json'), JSON.stringify(singleLoop()));
}, 120_000);
afterAll(() => scratch.remove());

describe('the command line', () => {
  it.each(['unit.xlsx', 'unit.csv'])(
    'checks and evaluates %s like the document it makes',
    async (file) => {
      const checked = await heddle(['check', here(file)]);
      expect(checked.stderr).toBe('');
      expect(checked.code).toBe(0);
      expect(checked.stdout).toContain('Feed heater outlet');
      const scored = async (name: string): Promise<Loose> =>
        JSON.parse((await heddle(['evaluate', '--json', here(name)])).stdout);
      const { present } = await scored(file);
      expect(present).toEqual((await scored('unit.json')).present);
    },
  );

  it('names the cells of every fault, on lines and as JSON', async () => {
    const text = readFileSync(here('unit.csv'), 'utf8').replace(
      /^TI-101,degC,0,100/m,
      'TI-101,degC,0,"100,5"',
    );
    writeFileSync(here('bad.csv'), text);
    const row = text.split('\r\n').findIndex((line) => line.startsWith('TI-101,')) + 1;
    const { code, stderr } = await heddle(['check', here('bad.csv')]);
    expect(code).toBe(2);
    expect(stderr).toContain(
      `measurements!D${row} (TI-101, high): a number with a comma in it; found "100,5"`,
    );
    const { stdout } = await heddle(['check', '--json', here('bad.csv')]);
    expect(JSON.parse(stdout).faults).toMatchObject([
      { code: 'CELL_COMMA', path: `measurements!D${row} (TI-101, high)` },
    ]);
  });

  it('names the cell of a warning', async () => {
    const job: Loose = singleLoop();
    job.loops[0].present.gain = -1.2;
    writeFileSync(here('warned.xlsx'), await writeSpreadsheet(job));
    const { stdout } = await heddle(['check', '--json', here('warned.xlsx')]);
    expect(JSON.parse(stdout).warnings[0].path).toBe('loops!O2 (TC-101, gain)');
  });

  it('writes a template that it accepts, around an example or a document, and over nothing', async () => {
    for (const [file, more] of [
      ['template.xlsx', []],
      ['template.csv', ['--from', here('unit.json')]],
    ] as const) {
      expect((await heddle(['template', '--out', here(file), ...more])).code).toBe(0);
      const { document } = await readSpreadsheet(readFileSync(here(file)));
      if (more.length > 0) expect(JSON.parse(document ?? '')).toEqual(singleLoop());
      expect((await heddle(['check', here(file)])).code).toBe(0);
    }
    const again = await heddle(['template', '--out', here('template.xlsx')]);
    expect(again.code).toBe(2);
    expect(again.stderr).toContain('there is such a file already');
    const other = await heddle(['template', '--out', here('template.ods')]);
    expect(other.code).toBe(2);
  });
});

describe('a calculation thread', () => {
  let threads: Calculations | undefined;
  afterAll(() => threads?.close());

  it('reads and writes spreadsheets', async () => {
    const entry = pathToFileURL(join(checkout, 'dist/workers/compute-thread.js'));
    threads = startCalculations({ threads: 1, entry });
    const document = readFileSync(here('unit.json'));
    const file = await threads.run('write spreadsheet', { document, format: 'xlsx' });
    const answer = await threads.run('read spreadsheet', { source: file, isGrid: false });
    if (!(answer instanceof Uint8Array)) throw new Error('refused');
    const reading = spreadsheetReadingSchema.parse(JSON.parse(new TextDecoder().decode(answer)));
    expect(JSON.parse(reading.document ?? '')).toEqual(singleLoop());
    const source = new TextEncoder().encode(JSON.stringify(reading.grid));
    expect(await threads.run('read spreadsheet', { source, isGrid: true })).toEqual(answer);
    const nothing = new TextEncoder().encode('{"sheets":1}');
    expect(await threads.run('read spreadsheet', { source: nothing, isGrid: true })).toMatchObject({
      ok: false,
      faults: [{ path: 'sheets' }],
    });
  });
});
