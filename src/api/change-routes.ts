import { actSchema, changeListSchema, changeSchema, proposalSchema } from '../contract/index.js';
import { json, noQuery, ofBodies, problems } from './route-schema.js';
import { type Api, changePath, jobPath, type Skin } from './skin.js';

const tags = ['changes'];

/** Changes on their way to the control room: proposed, and decided by a person. */
export function changeRoutes(app: Api, { service }: Skin): void {
  app.post(
    '/api/jobs/:job/changes',
    {
      schema: {
        operationId: 'proposeChange',
        tags,
        summary: 'Propose an alternative',
        description: 'Who proposes it, and why; the answer names its address in `Location`.',
        params: jobPath,
        querystring: noQuery,
        body: proposalSchema,
        response: {
          201: json('The change', changeSchema),
          ...problems(
            ...ofBodies,
            'JOB_UNKNOWN',
            'ALTERNATIVE_UNKNOWN',
            'NOT_PROPOSABLE',
            'FRONT_NOT_READY',
            'FRONT_ABSENT',
            'STORAGE_FULL',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    async (request, reply) => {
      const change = await service.propose(request.params.job, request.body);
      reply.code(201).header('location', `/api/changes/${change.id}`);
      return change;
    },
  );

  app.get(
    '/api/jobs/:job/changes',
    {
      schema: {
        operationId: 'listJobChanges',
        tags,
        summary: 'List the changes of a job, the latest first',
        params: jobPath,
        querystring: noQuery,
        response: {
          200: json('The changes', changeListSchema),
          ...problems('JOB_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.changes(request.params.job),
  );

  app.get(
    '/api/changes',
    {
      schema: {
        operationId: 'listChanges',
        tags,
        summary: 'List all changes, the latest first',
        querystring: noQuery,
        response: {
          200: json('The changes', changeListSchema),
          ...problems('RECORDS_UNREACHABLE'),
        },
      },
    },
    () => service.changes(),
  );

  app.get(
    '/api/changes/:change',
    {
      schema: {
        operationId: 'getChange',
        tags,
        summary: 'Look at a change',
        params: changePath,
        querystring: noQuery,
        response: {
          200: json('The change', changeSchema),
          ...problems('CHANGE_UNKNOWN', 'RECORDS_UNREACHABLE'),
        },
      },
    },
    (request) => service.change(request.params.change),
  );

  decisionRoute(app, 'approve', 'Approve a change', (change, act) => service.approve(change, act));
  decisionRoute(app, 'reject', 'Reject a change', (change, act) => service.reject(change, act));
}

function decisionRoute(
  app: Api,
  decision: 'approve' | 'reject',
  summary: string,
  decide: Skin['service']['approve'],
): void {
  app.post(
    `/api/changes/:change/${decision}`,
    {
      schema: {
        operationId: `${decision}Change`,
        tags,
        summary,
        description: 'Who decides, and why. A change is decided once.',
        params: changePath,
        querystring: noQuery,
        body: actSchema,
        response: {
          200: json('The change as it stands now', changeSchema),
          ...problems(
            ...ofBodies,
            'CHANGE_UNKNOWN',
            'CHANGE_DECIDED',
            'SAME_PERSON',
            'STORAGE_FULL',
            'RECORDS_UNREACHABLE',
          ),
        },
      },
    },
    (request) => decide(request.params.change, request.body),
  );
}
