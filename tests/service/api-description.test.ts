import { describe, expect, it } from 'vitest';
import { z } from 'zod';
import { problemCodes } from '../../src/contract/index.js';
import { jobBytes, jsonType, openApi, submitted } from './api-server.js';

/** The parts of OpenAPI 3.1 that the description uses, and nothing beside them. */
const schema = z.record(z.string(), z.unknown());
const media = z.record(z.string().regex(/^\w+\/[\w.+-]+$/), z.strictObject({ schema }));
const parameter = z.strictObject({
  name: z.string(),
  in: z.enum(['path', 'query', 'header']),
  required: z.boolean(),
  schema,
});
const operation = z.strictObject({
  operationId: z.string().regex(/^[a-z][A-Za-z]+$/),
  tags: z.array(z.string()).length(1),
  summary: z.string().min(5),
  description: z.string().min(5).optional(),
  parameters: z.array(parameter).optional(),
  requestBody: z.strictObject({ required: z.boolean(), content: media }).optional(),
  responses: z.record(
    z.string().regex(/^[2-5]\d\d$/),
    z.strictObject({
      description: z.string().refine((words) => words !== 'Default Response'),
      content: media.optional(),
    }),
  ),
});
const document = z.strictObject({
  openapi: z.literal('3.1.0'),
  info: z.strictObject({ title: z.string(), version: z.string(), description: z.string() }),
  tags: z.array(z.strictObject({ name: z.string(), description: z.string() })),
  paths: z.record(z.string().startsWith('/'), z.partialRecord(z.enum(['get', 'post']), operation)),
  components: z.strictObject({ schemas: z.record(z.string(), schema) }),
});

async function described() {
  const api = await openApi();
  const answer = await api.app.inject('/api/openapi.json');
  expect(answer.statusCode).toBe(200);
  const text = answer.body;
  const description = document.parse(answer.json());
  const operations = Object.entries(description.paths).flatMap(([path, methods]) =>
    Object.entries(methods).map(([method, one]) => ({ path, method, one: operation.parse(one) })),
  );
  return { ...api, text, description, operations };
}

describe('the description of the interface', () => {
  it('is a whole OpenAPI 3.1 document of every route and no other', async () => {
    const { operations } = await described();
    expect(operations.map(({ path, method }) => `${method} ${path}`).sort()).toEqual([
      'get /api/changes',
      'get /api/changes/{change}',
      'get /api/changes/{change}/sheet',
      'get /api/jobs',
      'get /api/jobs/{job}',
      'get /api/jobs/{job}/alternatives/{alternative}',
      'get /api/jobs/{job}/changes',
      'get /api/jobs/{job}/document',
      'get /api/jobs/{job}/events',
      'get /api/jobs/{job}/front',
      'get /api/jobs/{job}/own',
      'get /api/jobs/{job}/spreadsheet',
      'get /api/openapi.json',
      'get /api/spreadsheet/template',
      'get /healthz',
      'get /readyz',
      'post /api/changes/{change}/approve',
      'post /api/changes/{change}/reject',
      'post /api/check',
      'post /api/evaluate',
      'post /api/jobs',
      'post /api/jobs/{job}/cancel',
      'post /api/jobs/{job}/changes',
      'post /api/jobs/{job}/evaluate',
      'post /api/jobs/{job}/own',
      'post /api/spreadsheet',
    ]);
  });

  it('names each operation once, under a tag that is explained', async () => {
    const { operations, description } = await described();
    const names = operations.map(({ one }) => one.operationId);
    expect(new Set(names).size).toBe(names.length);
    const tags = description.tags.map(({ name }) => name);
    for (const { one } of operations) expect(tags).toContain(one.tags[0]);
  });

  it('declares what each path names, and nothing that it does not', async () => {
    const { operations } = await described();
    for (const { path, one } of operations) {
      const named = [...path.matchAll(/\{(\w+)\}/g)].map(([, name]) => name);
      const declared = (one.parameters ?? []).filter((given) => given.in === 'path');
      expect(declared.map(({ name }) => name)).toEqual(named);
      expect(declared.every(({ required }) => required)).toBe(true);
    }
  });

  it('gives each operation an answer and the problem documents it may end with', async () => {
    const { operations } = await described();
    for (const { path, method, one } of operations) {
      const statuses = Object.keys(one.responses);
      expect(statuses.filter((status) => status < '300')).not.toEqual([]);
      expect(statuses).toEqual(expect.arrayContaining(['400', '421', '500', '503']));
      if (method === 'post')
        expect(statuses).toEqual(expect.arrayContaining(['403', '413', '415']));
      if (path.includes('{')) expect(statuses).toContain('404');
      for (const [status, { content, description }] of Object.entries(one.responses)) {
        if (status < '400') continue;
        expect(content?.['application/problem+json']?.schema).toEqual({
          $ref: '#/components/schemas/Problem',
        });
        const codes = [...description.matchAll(/`([A-Z_]+)`/g)].map(([, code]) => code ?? '');
        expect(codes.length).toBeGreaterThan(0);
        for (const code of codes) {
          expect(problemCodes[code as keyof typeof problemCodes].status).toBe(Number(status));
        }
      }
    }
  });

  it('has the catalogue of codes as it is: as the values of the code, in its table, at some route', async () => {
    const { description, operations } = await described();
    const codes = Object.keys(problemCodes);
    const { properties } = z
      .object({ properties: z.object({ code: z.object({ enum: z.array(z.string()) }) }) })
      .parse(description.components.schemas['Problem']);
    expect(properties.code.enum).toEqual(codes);
    for (const [code, { status, title }] of Object.entries(problemCodes)) {
      expect(description.info.description).toContain(`| \`${code}\` | ${status} | ${title} |`);
    }
    const told = operations.flatMap(({ one }) =>
      Object.values(one.responses).flatMap(
        (answer) => answer.description.match(/[A-Z_]{4,}/g) ?? [],
      ),
    );
    const everywhere = ['NOT_FOUND', 'METHOD_NOT_ALLOWED'];
    expect(new Set([...told, ...everywhere])).toEqual(new Set(codes));
  });

  it('refers to no component that is not there, and has none that nothing refers to', async () => {
    const { text, description } = await described();
    const referred = [...text.matchAll(/"\$ref":"([^"]*)"/g)].map(([, target = '']) => target);
    const there = Object.keys(description.components.schemas);
    expect(new Set(referred)).toEqual(new Set(there.map((name) => `#/components/schemas/${name}`)));
  });

  it('says of a body when it may be left out', async () => {
    const { operations } = await described();
    const optional = operations.filter(({ one }) => one.requestBody?.required === false);
    expect(optional.map(({ one }) => one.operationId)).toEqual(['cancelJob']);
  });

  it('holds for what is answered: the answers fit its schemas', async () => {
    const { app, service, description } = await described();
    const { schemas } = description.components;
    const fits = (name: string, value: unknown): void => {
      const root = { ...schemas[name], $defs: schemas };
      const text = JSON.stringify(root).replaceAll('#/components/schemas/', '#/$defs/');
      expect(() => z.fromJSONSchema(JSON.parse(text)).parse(value)).not.toThrow();
      expect(() => z.fromJSONSchema(JSON.parse(text)).parse({ strange: 1 })).toThrow();
    };
    const id = await submitted({ app, service }, 'done');
    const { id: change } = await service.propose(id, {
      alternative: 'A01',
      person: 'a',
      reason: 'b',
    });
    const addresses = {
      [`/api/jobs/${id}`]: 'Job',
      '/api/jobs': 'JobList',
      [`/api/jobs/${id}/document`]: 'JobDocumentInput',
      [`/api/jobs/${id}/front`]: 'Front',
      [`/api/jobs/${id}/alternatives/A01`]: 'Alternative',
      [`/api/jobs/${id}/alternatives/none`]: 'Problem',
      '/api/changes': 'ChangeList',
      [`/api/changes/${change}`]: 'Change',
      [`/api/changes/${change}/sheet`]: 'Sheet',
      '/readyz': 'Readiness',
    };
    for (const [url, name] of Object.entries(addresses)) fits(name, (await app.inject(url)).json());
    const posts = {
      '/api/check': 'CheckReport',
      '/api/evaluate': 'Evaluation',
      '/api/jobs': 'AcceptedJob',
    };
    for (const [url, name] of Object.entries(posts)) {
      const answer = await app.inject({
        method: 'POST',
        url,
        headers: jsonType,
        payload: jobBytes,
      });
      fits(name, answer.json());
    }
  });
});
