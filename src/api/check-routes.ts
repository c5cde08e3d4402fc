import { z } from 'zod';
import { checkReportSchema, mostDocumentBytes } from '../contract/index.js';
import { evaluationBytes, jobDocumentBytes, settingsBytes } from './components.js';
import { json, noQuery, ofBodies, problems } from './route-schema.js';
import { type Api, jobPath, type Skin } from './skin.js';

const tags = ['documents'];
const refusals = [...ofBodies, 'DOCUMENT_REFUSED', 'CALCULATION_REFUSED', 'BUSY'] as const;

/** Which models settings are scored on. */
const modelsQuery = z.strictObject({ models: z.enum(['search', 'all']).default('all') });

/** What can be said of a document at once, without a job. */
export function checkRoutes(app: Api, { service, open }: Skin): void {
  app.post(
    '/api/check',
    {
      bodyLimit: mostDocumentBytes,
      config: { isDocument: true },
      schema: {
        operationId: 'check',
        tags,
        summary: 'Check a job document',
        description:
          'What the document says, the interaction of its loops, what would be run and about how ' +
          'long. Nothing is recorded.',
        querystring: noQuery,
        body: jobDocumentBytes,
        response: {
          200: json('What is known of the job before anything is searched', checkReportSchema),
          ...problems(...refusals),
        },
      },
    },
    (request, reply) => open.work(reply, (signal) => service.check(request.body, signal)),
  );

  app.post(
    '/api/evaluate',
    {
      bodyLimit: mostDocumentBytes,
      config: { isDocument: true },
      schema: {
        operationId: 'evaluate',
        tags,
        summary: "Score a document's present settings",
        description: 'The figures and responses of the present settings. Nothing is recorded.',
        querystring: noQuery,
        body: jobDocumentBytes,
        response: { 200: json('The evaluation', evaluationBytes), ...problems(...refusals) },
      },
    },
    async (request, reply) => {
      const work = (signal: AbortSignal) => service.evaluate(request.body, signal);
      return reply.type('application/json').send(await open.work(reply, work));
    },
  );

  app.post(
    '/api/jobs/:job/evaluate',
    {
      bodyLimit: mostDocumentBytes,
      config: { isDocument: true },
      schema: {
        operationId: 'evaluateSettings',
        tags: ['results'],
        summary: 'Score other settings for a job',
        description:
          "Settings by loop tag, in each controller's own terms, or an alternative as it is in a " +
          'front; loops not named keep their present settings. `models=search` leaves out the models ' +
          'that only verify, for trying settings while typing.',
        params: jobPath,
        querystring: modelsQuery,
        body: settingsBytes,
        response: {
          200: json('The evaluation', evaluationBytes),
          ...problems(...refusals, 'JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    async (request, reply) => {
      const { params, body, query } = request;
      const work = (signal: AbortSignal) =>
        service.evaluateSettings(params.job, body, query.models, signal);
      return reply.type('application/json').send(await open.work(reply, work));
    },
  );
}
