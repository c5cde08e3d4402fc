import { alternativeBytes, frontBytes } from './components.js';
import { notModified, sendDocument } from './document-answer.js';
import { json, noQuery, problems } from './route-schema.js';
import { type Api, alternativePath, jobPath, type Skin } from './skin.js';

const tags = ['results'];

/** What a job has found. */
export function resultRoutes(app: Api, { service }: Skin): void {
  app.get(
    '/api/jobs/:job/front',
    {
      schema: {
        operationId: 'getFront',
        tags,
        summary: 'Get the front of a job',
        description:
          'The stored bytes, the same for everybody; `ETag` is their SHA-256, and what the caller ' +
          'has already is answered with 304.',
        params: jobPath,
        querystring: noQuery,
        response: {
          200: json('The front', frontBytes),
          304: notModified,
          ...problems('JOB_UNKNOWN', 'FRONT_NOT_READY', 'FRONT_ABSENT', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    async (request, reply) => sendDocument(request, reply, await service.front(request.params.job)),
  );

  app.get(
    '/api/jobs/:job/alternatives/:alternative',
    {
      schema: {
        operationId: 'getAlternative',
        tags,
        summary: 'Get one alternative with its responses',
        description:
          "The alternative's own document; `present` gives that of today's settings, `B01` and on those " +
          'of the published rules, in the order of the front.',
        params: alternativePath,
        querystring: noQuery,
        response: {
          200: json('The alternative', alternativeBytes),
          304: notModified,
          ...problems(
            'JOB_UNKNOWN',
            'ALTERNATIVE_UNKNOWN',
            'FRONT_NOT_READY',
            'FRONT_ABSENT',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    async (request, reply) => {
      const { job, alternative } = request.params;
      return sendDocument(request, reply, await service.alternative(job, alternative));
    },
  );
}
