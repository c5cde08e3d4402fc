import { keepingSchema, ownSettingsListSchema, ownSettingsSchema } from '../contract/index.js';
import { json, noQuery, ofBodies, problems } from './route-schema.js';
import { type Api, jobPath, type Skin } from './skin.js';

const tags = ['results'];

/** Settings that people try on the unit of a job and keep under a name. */
export function ownSettingsRoutes(app: Api, { service, open }: Skin): void {
  app.post(
    '/api/jobs/:job/own',
    {
      schema: {
        operationId: 'keepSettings',
        tags,
        summary: 'Keep settings of your own',
        description:
          'Judged on the same models as an alternative of the front, and kept under a name; they can ' +
          'then be proposed like an alternative. Their document is at `/api/jobs/ID/alternatives/U01`.',
        params: jobPath,
        querystring: noQuery,
        body: keepingSchema,
        response: {
          201: json('The settings as they are kept', ownSettingsSchema),
          ...problems(
            ...ofBodies,
            'JOB_UNKNOWN',
            'DOCUMENT_REFUSED',
            'CALCULATION_REFUSED',
            'BUSY',
            'STORAGE_FULL',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    async (request, reply) => {
      const { params, body } = request;
      const kept = await open.work(reply, (signal) => service.keep(params.job, body, signal));
      reply.code(201).header('location', `/api/jobs/${kept.job}/alternatives/${kept.id}`);
      return kept;
    },
  );

  app.get(
    '/api/jobs/:job/own',
    {
      schema: {
        operationId: 'listOwnSettings',
        tags,
        summary: 'List the settings that people kept for a job',
        params: jobPath,
        querystring: noQuery,
        response: {
          200: json('The settings, the first kept first', ownSettingsListSchema),
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.ownSettings(request.params.job),
  );
}
