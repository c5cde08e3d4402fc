import { livenessSchema, readinessSchema } from '../contract/index.js';
import { json, noQuery, problems } from './route-schema.js';
import type { Api, Skin } from './skin.js';

const tags = ['server'];

/** What watches over the server asks. */
export function healthRoutes(app: Api, { service }: Skin): void {
  app.get(
    '/healthz',
    {
      schema: {
        operationId: 'isServing',
        tags,
        summary: 'Whether the process serves',
        querystring: noQuery,
        response: { 200: json('It does', livenessSchema), ...problems() },
      },
    },
    () => ({ serving: true as const }),
  );

  app.get(
    '/readyz',
    {
      schema: {
        operationId: 'isReady',
        tags,
        summary: 'Whether the parts it needs can be reached',
        description: 'Each part by name, with what is wrong where it cannot be reached.',
        querystring: noQuery,
        response: {
          200: json('All can be reached', readinessSchema),
          ...problems(),
          503: {
            description: 'Some part cannot be reached, or `STOPPING`: The server is stopping.',
            content: {
              ...json('', readinessSchema).content,
              ...problems()[503]?.content,
            },
          },
        },
      },
    },
    async (_request, reply) => {
      const { ready, parts } = await service.readiness();
      return reply.code(ready ? 200 : 503).send({ ready, parts: [...parts] });
    },
  );
}
