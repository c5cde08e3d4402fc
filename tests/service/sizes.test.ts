import { createHash } from 'node:crypto';
import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { frontSchema } from '../../src/contract/index.js';
import { Installation, sizes } from '../servers/installation.js';
import { build, heddle } from './built-program.js';
import { Scratch } from './scratch.js';
import { twinHeater } from './twin-heater.js';

const document = twinHeater();
const scratch = new Scratch();
/** What `solve` finds, in one process without any service. */
let solved: { readonly front: string; readonly first: string; readonly present: string };

beforeAll(async () => {
  build();
  const [job, front, responses] = ['job.json', 'front.json', 'responses'].map((name) =>
    join(scratch.folder, name),
  ) as [string, string, string];
  scratch.write({ 'job.json': JSON.stringify(document) });
  const ended = await heddle(['solve', job, '--out', front, '--responses', responses]);
  expect(ended).toMatchObject({ code: 0 });
  const read = (path: string): string => readFileSync(path, 'utf8').trimEnd();
  solved = {
    front: read(front),
    first: read(join(responses, 'A01.json')),
    present: read(join(responses, 'present.json')),
  };
});

afterAll(() => scratch.remove());

const sha256 = (text: string): string => createHash('sha256').update(text, 'utf8').digest('hex');

describe.each(sizes)('one job, %s', (size) => {
  let installation: Installation;

  beforeAll(async () => {
    installation = await Installation.start(size);
  });
  afterAll(() => installation.stop());

  it('gives the front that `solve` writes, byte for byte, and the documents it names', async () => {
    const id = await installation.submit(document);
    const job = await installation.ended(id);
    expect(job).toMatchObject({ state: 'done', feasible: true, failure: null });
    const front = await installation.front(id);
    expect(sha256(front)).toBe(sha256(solved.front));
    const { alternatives, present } = frontSchema.parse(JSON.parse(front));
    expect(job.alternatives).toBe(alternatives.length);
    const detail = async (name: string): Promise<string> =>
      new TextDecoder().decode(await installation.client.alternative(id, name));
    expect(await detail('A01')).toBe(solved.first);
    expect(await detail('present')).toBe(solved.present);
    expect(sha256(solved.first)).toBe(alternatives[0]?.detail);
    expect(sha256(solved.present)).toBe(present?.detail);
  });
});
