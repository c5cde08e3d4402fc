import type { FastifyReply } from 'fastify';
import { z } from 'zod';
import { excerpt, mostDocumentBytes } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';
import { acceptedType } from './accepted-types.js';
import { fileBytes, fileOrGridBytes, spreadsheetReadingBytes } from './components.js';
import { json, noQuery, ofBodies, problems } from './route-schema.js';
import { type Api, jobPath, type Skin } from './skin.js';

const xlsx = 'application/vnd.openxmlformats-officedocument.spreadsheetml.sheet';
const types = { xlsx, csv: 'text/csv' } as const;
type Format = keyof typeof types;

/** What may be handed in as a spreadsheet: a file, or its cells. */
const spreadsheetTypes = [xlsx, types.csv, 'application/json'] as const;

const formatQuery = z.strictObject(
  { format: z.enum(['xlsx', 'csv']).exactOptional() },
  { error: (issue) => (issue.code === 'unrecognized_keys' ? 'format' : undefined) },
);

const file = {
  description: 'The spreadsheet, as a file to keep',
  content: { [xlsx]: { schema: fileBytes }, 'text/csv': { schema: z.string() } },
};

/** Job documents as the cells of spreadsheets. */
export function spreadsheetRoutes(app: Api, { service, open }: Skin): void {
  app.post(
    '/api/spreadsheet',
    {
      bodyLimit: mostDocumentBytes,
      config: { isDocument: true, takes: spreadsheetTypes },
      schema: {
        operationId: 'readSpreadsheet',
        tags: ['documents'],
        summary: 'Read a spreadsheet as a job document',
        description:
          'An XLSX or CSV file, or its cells as JSON (a grid, as the answer has it). The answer has ' +
          'the cells, the text of the job document they make, or every fault at its cell, and is the ' +
          'same 200 for both. Nothing is recorded.',
        querystring: noQuery,
        consumes: [...spreadsheetTypes],
        body: fileOrGridBytes,
        response: {
          200: json('What the spreadsheet says', spreadsheetReadingBytes),
          ...problems(...ofBodies, 'DOCUMENT_REFUSED', 'CALCULATION_REFUSED', 'BUSY'),
        },
      },
    },
    async (request, reply) => {
      const type = request.headers['content-type'] ?? '';
      const isGrid = type.toLowerCase().startsWith('application/json');
      const work = (signal: AbortSignal) => service.readSpreadsheet(request.body, isGrid, signal);
      return reply.type('application/json').send(await open.work(reply, work));
    },
  );

  app.get(
    '/api/spreadsheet/template',
    {
      schema: {
        operationId: 'getTemplate',
        tags: ['documents'],
        summary: 'Take away a spreadsheet to fill in',
        description:
          'XLSX, or CSV by `format=csv` or `Accept: text/csv`; an invented unit fills it.',
        querystring: formatQuery,
        response: { 200: file, ...problems('NOT_ACCEPTABLE', 'CALCULATION_REFUSED', 'BUSY') },
      },
    },
    async (request, reply) => {
      const format = request.query.format ?? formatFor(request.headers.accept);
      const work = (signal: AbortSignal) => service.template(format, signal);
      const bytes = await open.work(reply, work);
      nameFile(reply, `heddle-template.${format}`);
      return sendFile(reply, bytes, format);
    },
  );

  app.get(
    '/api/jobs/:job/spreadsheet',
    {
      schema: {
        operationId: 'getJobSpreadsheet',
        tags: ['jobs'],
        summary: 'Get the document of a job as a spreadsheet',
        description:
          'XLSX, or CSV by `format=csv` or `Accept: text/csv`. Handed in again it makes a document ' +
          'that says the same.',
        params: jobPath,
        querystring: formatQuery,
        response: {
          200: file,
          ...problems(
            'JOB_UNKNOWN',
            'NOT_ACCEPTABLE',
            'CALCULATION_REFUSED',
            'BUSY',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    async (request, reply) => {
      const { job } = request.params;
      const format = request.query.format ?? formatFor(request.headers.accept);
      const work = (signal: AbortSignal) => service.spreadsheet(job, format, signal);
      const bytes = await open.work(reply, work);
      nameFile(reply, `heddle-job-${job}.${format}`);
      return sendFile(reply, bytes, format);
    },
  );
}

function nameFile(reply: { header(name: string, value: string): unknown }, name: string): void {
  reply.header('vary', 'accept');
  reply.header('content-disposition', `attachment; filename="${name}"`);
}

/** @throws NOT_ACCEPTABLE */
function formatFor(accept: string | undefined): Format {
  const type = acceptedType(accept, [types.xlsx, types.csv]);
  if (type === types.xlsx) return 'xlsx';
  if (type === types.csv) return 'csv';
  const detail = `found Accept ${excerpt(accept)}; allowed: ${Object.values(types).join(', ')}`;
  throw new ServiceProblem('NOT_ACCEPTABLE', detail);
}

function sendFile(reply: FastifyReply, bytes: Uint8Array, format: Format): FastifyReply {
  const parameters = format === 'csv' ? '; charset=utf-8; header=absent' : '';
  return reply.type(`${types[format]}${parameters}`).send(Buffer.from(bytes) as never);
}
