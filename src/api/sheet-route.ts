import { z } from 'zod';
import { excerpt, sheetSchema } from '../contract/index.js';
import { ServiceProblem, sheetCsv } from '../service/index.js';
import { acceptedType } from './accepted-types.js';
import { problems } from './route-schema.js';
import { type Api, changePath, type Skin } from './skin.js';

const types = { json: 'application/json', csv: 'text/csv' } as const;
type Format = keyof typeof types;

const sheetQuery = z.strictObject(
  { format: z.enum(['json', 'csv']).exactOptional() },
  { error: (issue) => (issue.code === 'unrecognized_keys' ? 'format' : undefined) },
);

/** The sheet that goes to the control room. */
export function sheetRoute(app: Api, { service }: Skin): void {
  app.get(
    '/api/changes/:change/sheet',
    {
      schema: {
        operationId: 'getSheet',
        tags: ['changes'],
        summary: 'Take away the sheet of a change',
        description:
          'JSON, or plain rows by `format=csv` or `Accept: text/csv`. In rows a text that a ' +
          'spreadsheet would take for a formula begins with an apostrophe.',
        params: changePath,
        querystring: sheetQuery,
        response: {
          200: {
            description: 'The sheet, as a file to keep',
            content: {
              'application/json': { schema: sheetSchema },
              'text/csv': { schema: z.string() },
            },
          },
          ...problems('CHANGE_UNKNOWN', 'NOT_ACCEPTABLE', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    async (request, reply) => {
      const { change } = request.params;
      const format = request.query.format ?? formatFor(request.headers.accept);
      const sheet = await service.sheet(change);
      const file = `heddle-change-${change}.${format}`;
      reply
        .header('vary', 'accept')
        .header('content-disposition', `attachment; filename="${file}"`);
      if (format === 'json') return sheet;
      return reply.type('text/csv; charset=utf-8; header=present').send(sheetCsv(sheet));
    },
  );
}

/** @throws NOT_ACCEPTABLE */
function formatFor(accept: string | undefined): Format {
  const type = acceptedType(accept, [types.json, types.csv]);
  if (type === types.json) return 'json';
  if (type === types.csv) return 'csv';
  const detail = `found Accept ${excerpt(accept)}; allowed: ${Object.values(types).join(', ')}`;
  throw new ServiceProblem('NOT_ACCEPTABLE', detail);
}
