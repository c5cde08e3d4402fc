import { z } from 'zod';
import { excerpt } from '../contract/index.js';
import { ServiceProblem } from '../service/index.js';
import { nothing } from './components.js';
import { jobEvents, seenBefore } from './event-stream.js';
import { errorProblem } from './problem-answer.js';
import { noQuery, problems } from './route-schema.js';
import { type Api, jobPath, type Skin } from './skin.js';

const eventHeaders = z.looseObject({ 'last-event-id': z.string().exactOptional() });

/** A job's progress as it happens. */
export function eventRoute(app: Api, { service, open, heartbeat }: Skin): void {
  app.get(
    '/api/jobs/:job/events',
    {
      schema: {
        operationId: 'watchJob',
        tags: ['jobs'],
        summary: 'Watch a job',
        description:
          'Server-sent events: an event `job` with the record now and whenever it has changed, a ' +
          'comment where nothing happens for a while. The stream ends with the job. Asked again ' +
          'with the last id of an ended stream the answer is 204, which stops a browser from asking.',
        params: jobPath,
        querystring: noQuery,
        headers: eventHeaders,
        response: {
          200: {
            description: 'Events; the data of each `job` is a job record',
            content: { 'text/event-stream': { schema: z.string() } },
          },
          204: nothing('The caller has seen the last event of this job'),
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    async (request, reply) => {
      const { job } = request.params;
      const { after, all } = seenBefore(request.headers['last-event-id']);
      if (all || request.method === 'HEAD') await service.job(job);
      if (all) return reply.code(204).send();
      if (request.method === 'HEAD') return reply.type('text/event-stream').send('');
      const signal = open.signalOf(reply);
      const records = service.watch(job, signal)[Symbol.asyncIterator]();
      const first = await records.next();
      if (first.done === true) {
        throw signal.reason instanceof ServiceProblem ? signal.reason : unwatched(job);
      }
      // A stream is a connection of its own: closing it with the job frees whoever waits for its end.
      reply.type('text/event-stream').header('connection', 'close');
      reply.header('x-accel-buffering', 'no');
      const problemOf = (error: unknown) => errorProblem(error, request);
      const events = jobEvents(first.value, records, { heartbeat, after, signal, problemOf });
      return reply.send(events as never);
    },
  );
}

const unwatched = (job: string): ServiceProblem =>
  new ServiceProblem('JOB_UNKNOWN', `there is nothing to watch of job ${excerpt(job)}`);
