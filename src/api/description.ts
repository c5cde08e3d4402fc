import swagger from '@fastify/swagger';
import type { FastifyInstance } from 'fastify';
import {
  createJsonSchemaTransform,
  createJsonSchemaTransformObject,
} from 'fastify-type-provider-zod';
import { z } from 'zod';
import { problemCodes } from '../contract/index.js';
import { components } from './components.js';
import { json, noQuery, problems } from './route-schema.js';
import type { Api } from './skin.js';

const address = '/api/openapi.json';

type Described = Readonly<Record<string, unknown>>;
type Paths = Readonly<Record<string, Readonly<Record<string, Operation>>>>;
interface Operation {
  readonly requestBody?: { required: boolean };
}
type Schemas = Readonly<Record<string, unknown>>;

/** Describes every route that is added from now on. */
export async function describeRoutes(app: FastifyInstance): Promise<void> {
  const toComponents = createJsonSchemaTransformObject({ schemaRegistry: components });
  await app.register(swagger, {
    openapi: {
      openapi: '3.1.0',
      info: { title: 'Heddle', version: '1', description: introduction() },
      tags: [
        { name: 'documents', description: 'What can be said of a job document at once' },
        { name: 'jobs', description: 'Jobs: handed in, watched, stopped' },
        { name: 'results', description: 'What a job has found' },
        { name: 'changes', description: 'Alternatives on their way to the control room' },
        { name: 'server', description: 'The server itself' },
      ],
    },
    transform: createJsonSchemaTransform({ schemaRegistry: components }),
    transformObject: (document) => finished(toComponents(document) as Described) as never,
  });
}

/** Hands out the description, made once all routes are known. */
export function descriptionRoute(app: Api): void {
  let bytes: Buffer | undefined;
  app.get(
    address,
    {
      schema: {
        operationId: 'getDescription',
        tags: ['server'],
        summary: 'This description',
        querystring: noQuery,
        response: {
          200: json('An OpenAPI 3.1 document', z.record(z.string(), z.unknown())),
          ...problems(),
        },
      },
    },
    (_request, reply) => {
      bytes ??= Buffer.from(JSON.stringify(app.swagger()));
      return reply.type('application/json').send(bytes as never);
    },
  );
}

function introduction(): string {
  const rows = Object.entries(problemCodes).map(
    ([code, { status, title }]) => `| \`${code}\` | ${status} | ${title} |`,
  );
  return [
    'Heddle retunes all the PID loops of one process unit together.',
    'Every refusal is a problem document (RFC 9457) whose `code` is one of these:',
    `| code | status | what it means |\n| --- | --- | --- |\n${rows.join('\n')}`,
  ].join('\n\n');
}

/** Leaves out components that nothing refers to, and says where a body may be left out. */
function finished(document: Described): Described {
  const { components: parts, paths } = document as {
    readonly components: { readonly schemas: Schemas };
    readonly paths: Paths;
  };
  const body = paths['/api/jobs/{job}/cancel']?.['post']?.requestBody;
  if (body !== undefined) body.required = false;
  const used = Object.fromEntries(
    Object.entries(parts.schemas).filter(([name]) => name in reachable(paths, parts.schemas)),
  );
  return { ...document, components: { ...parts, schemas: used } };
}

/** Every component that routes refer to, directly or through others. */
function reachable(from: unknown, schemas: Schemas, found: Record<string, true> = {}) {
  for (const [, name = ''] of JSON.stringify(from).matchAll(/"#\/components\/schemas\/(\w+)"/g)) {
    if (name in found) continue;
    found[name] = true;
    reachable(schemas[name] ?? null, schemas, found);
  }
  return found;
}
