import { describe, expect, it } from 'vitest';
import {
  mostDocumentBytes,
  readJob,
  type SpreadsheetReading,
  spreadsheetReadingSchema,
} from '../../src/contract/index.js';
import { readSpreadsheet, writeSpreadsheet } from '../../src/spreadsheet/index.js';
import { jsonType, openApi, problemOf, submitted } from './api-server.js';
import { singleLoop } from './single-loop.js';

const xlsx = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';

type App = Awaited<ReturnType<typeof openApi>>['app'];

const post = (app: App, type: string, payload: Uint8Array | string) =>
  app.inject({
    method: 'POST',
    url: '/api/spreadsheet',
    headers: { 'content-type': type },
    payload: typeof payload === 'string' ? payload : Buffer.from(payload),
  });

const readingOf = (answer: { readonly body: string }): SpreadsheetReading =>
  spreadsheetReadingSchema.parse(JSON.parse(answer.body));

describe('POST /api/spreadsheet', () => {
  it.each([
    ['xlsx', xlsx],
    ['csv', 'text/csv; charset=utf-8'],
  ] as const)('makes a job document of %s, and its cells as a grid', async (format, type) => {
    const { app } = await openApi();
    const answer = await post(app, type, await writeSpreadsheet(singleLoop(), format));
    expect(answer.statusCode).toBe(200);
    const { document, faults, grid } = readingOf(answer);
    expect(faults).toEqual([]);
    expect(JSON.parse(document ?? '')).toEqual(singleLoop());
    expect(grid?.sheets.map(({ name }) => name)).toContain('loops');
  });

  it('reads a grid as it gave it, edited or not', async () => {
    const { app } = await openApi();
    const { grid } = readingOf(await post(app, xlsx, await writeSpreadsheet(singleLoop())));
    const same = readingOf(await post(app, 'application/json', JSON.stringify(grid)));
    expect(JSON.parse(same.document ?? '')).toEqual(singleLoop());
    const loops = grid?.sheets.find(({ name }) => name === 'loops');
    const column = loops?.rows[0]?.indexOf('gain') ?? -1;
    loops?.rows[1]?.splice(column, 1, 'ten');
    const edited = await post(app, 'application/json', JSON.stringify(grid));
    expect(edited.statusCode).toBe(200);
    const { document, faults } = readingOf(edited);
    expect(document).toBeNull();
    expect(faults).toMatchObject([
      { code: 'CELL_NUMBER', sheet: 'loops', cell: 'O2', heading: 'gain', subject: 'TC-101' },
    ]);
  });

  it('answers for a file that is none with a fault of the file', async () => {
    const { app } = await openApi();
    const answer = await post(app, xlsx, 'PK rubbish');
    expect(answer.statusCode).toBe(200);
    const { grid, document, faults } = readingOf(answer);
    expect([grid, document]).toEqual([null, null]);
    expect(faults).toMatchObject([{ code: 'FILE_DAMAGED', sheet: null, cell: null }]);
  });

  it('refuses a grid that is none, other types and too many bytes', async () => {
    const { app } = await openApi();
    const nothing = problemOf(await post(app, 'application/json', '{"sheets":[{"name":1}]}'));
    expect(nothing.code).toBe('DOCUMENT_REFUSED');
    expect(nothing.faults?.map(({ path }) => path)).toContain('sheets[0].name');
    const other = problemOf(await post(app, 'image/png', 'x'));
    expect(other.code).toBe('CONTENT_TYPE_UNKNOWN');
    expect(other.detail).toContain('text/csv');
    const large = problemOf(await post(app, 'text/csv', new Uint8Array(mostDocumentBytes + 1)));
    expect(large.code).toBe('BODY_TOO_LARGE');
  });

  it('is the one address that takes files', async () => {
    const { app } = await openApi();
    for (const url of ['/api/check', '/api/jobs', '/api/evaluate']) {
      const headers = { 'content-type': xlsx };
      const answer = await app.inject({ method: 'POST', url, headers, payload: 'PK' });
      const { code, detail } = problemOf(answer);
      expect(code).toBe('CONTENT_TYPE_UNKNOWN');
      expect(detail).toContain('allowed: application/json');
    }
  });
});

describe('a spreadsheet to take away', () => {
  it('is an example that reads back as a job, as XLSX or CSV', async () => {
    const { app } = await openApi();
    const asked = [
      { url: '/api/spreadsheet/template', headers: {}, type: xlsx, file: 'heddle-template.xlsx' },
      {
        url: '/api/spreadsheet/template',
        headers: { accept: 'text/csv' },
        type: 'text/csv',
        file: 'heddle-template.csv',
      },
      {
        url: '/api/spreadsheet/template?format=csv',
        headers: {},
        type: 'text/csv',
        file: 'heddle-template.csv',
      },
    ];
    for (const { url, headers, type, file } of asked) {
      const answer = await app.inject({ url, headers });
      expect(answer.statusCode).toBe(200);
      expect(answer.headers['content-type']).toContain(type);
      expect(answer.headers['content-disposition']).toBe(`attachment; filename="${file}"`);
      const { document } = await readSpreadsheet(answer.rawPayload);
      expect(readJob(document ?? '').ok).toBe(true);
    }
  });

  it('is the document of a job, which makes the same document again', async () => {
    const api = await openApi();
    const id = await submitted(api);
    for (const format of ['xlsx', 'csv']) {
      const answer = await api.app.inject(`/api/jobs/${id}/spreadsheet?format=${format}`);
      expect(answer.headers['content-disposition']).toContain(`heddle-job-${id}.${format}`);
      const { document } = await readSpreadsheet(answer.rawPayload);
      expect(JSON.parse(document ?? '')).toEqual(singleLoop());
    }
  });

  it('exists in no other form, and for no other job', async () => {
    const { app } = await openApi();
    const png = { url: '/api/spreadsheet/template', headers: { accept: 'image/png' } };
    expect(problemOf(await app.inject(png)).code).toBe('NOT_ACCEPTABLE');
    const query = '/api/spreadsheet/template?format=ods';
    expect(problemOf(await app.inject(query)).code).toBe('REQUEST_INVALID');
    const unknown = '/api/jobs/J000000000009/spreadsheet';
    expect(problemOf(await app.inject({ url: unknown, headers: jsonType })).code).toBe(
      'JOB_UNKNOWN',
    );
  });
});
