import { z } from 'zod';
import {
  acceptedJobSchema,
  cancellationSchema,
  jobIdSchema,
  jobListSchema,
  jobQuerySchema,
  jobRecordSchema,
  mostDocumentBytes,
} from '../contract/index.js';
import { jobDocumentBytes, originalBytes } from './components.js';
import { notModified, sendDocument } from './document-answer.js';
import { json, noQuery, ofBodies, problems } from './route-schema.js';
import { type Api, jobPath, type Skin } from './skin.js';

const tags = ['jobs'];

const submissionHeaders = z.looseObject({
  'idempotency-key': z
    .string()
    .regex(/^[\x21-\x7e](?:[\x20-\x7e]{0,198}[\x21-\x7e])?$/, '1 to 200 printable ASCII characters')
    .exactOptional(),
});

const submissionQuery = z.strictObject({ parent: jobIdSchema.exactOptional() });

/** Jobs: handed in, listed, looked at, stopped. */
export function jobRoutes(app: Api, { service }: Skin): void {
  app.post(
    '/api/jobs',
    {
      bodyLimit: mostDocumentBytes,
      config: { isDocument: true },
      schema: {
        operationId: 'submitJob',
        tags,
        summary: 'Hand in a job',
        description:
          'Recorded before it is answered; the answer names its address in `Location`. With an ' +
          '`Idempotency-Key` the same document gives the same job again, which the header ' +
          '`Idempotency-Replayed: true` then says, so that a request whose answer was lost can be ' +
          'sent anew. `parent` names the job that this one was made from.',
        headers: submissionHeaders,
        querystring: submissionQuery,
        body: jobDocumentBytes,
        response: {
          202: json('The job is accepted, now or before under the same key', acceptedJobSchema),
          ...problems(
            ...ofBodies,
            'JOB_UNKNOWN',
            'DOCUMENT_REFUSED',
            'CALCULATION_REFUSED',
            'IDEMPOTENCY_KEY_REUSED',
            'BUSY',
            'STORAGE_FULL',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    async (request, reply) => {
      const key = request.headers['idempotency-key'];
      const { isNew, ...accepted } = await service.submit(request.body, {
        ...(key === undefined ? {} : { key }),
        ...request.query,
      });
      reply.code(202).header('location', `/api/jobs/${accepted.job.id}`);
      if (!isNew) reply.header('idempotency-replayed', 'true');
      return accepted;
    },
  );

  app.get(
    '/api/jobs',
    {
      schema: {
        operationId: 'listJobs',
        tags,
        summary: 'List jobs, the latest first',
        description: 'A page at a time: `next` of one page is `before` of the next.',
        querystring: jobQuerySchema,
        response: {
          200: json('A page of jobs', jobListSchema),
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.jobs(request.query),
  );

  app.get(
    '/api/jobs/:job',
    {
      schema: {
        operationId: 'getJob',
        tags,
        summary: 'Look at a job',
        description: 'State, progress and cost as the record has them now.',
        params: jobPath,
        querystring: noQuery,
        response: {
          200: json('The job', jobRecordSchema),
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.job(request.params.job),
  );

  app.get(
    '/api/jobs/:job/document',
    {
      schema: {
        operationId: 'getJobDocument',
        tags,
        summary: 'Get the document of a job',
        description: 'The bytes as they were handed in.',
        params: jobPath,
        querystring: noQuery,
        response: {
          200: json('The document', originalBytes),
          304: notModified,
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    async (request, reply) =>
      sendDocument(request, reply, await service.document(request.params.job)),
  );

  app.post(
    '/api/jobs/:job/cancel',
    {
      schema: {
        operationId: 'cancelJob',
        tags,
        summary: 'Stop a job',
        description:
          'Person and reason are recorded; both may be left out, and the body with them.',
        params: jobPath,
        querystring: noQuery,
        body: cancellationSchema.optional(),
        response: {
          200: json('The job as it stands now', jobRecordSchema),
          ...problems(...ofBodies, 'JOB_UNKNOWN', 'JOB_ENDED', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.cancel(request.params.job, request.body ?? {}),
  );
}
