import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import {
  alternativeDetailSchema,
  evaluationSchema,
  frontSchema,
  ownSettingsListSchema,
  ownSettingsSchema,
  problemSchema,
  sheetSchema,
} from '../../src/contract/index.js';
import { Installation } from '../servers/installation.js';
import { build } from './built-program.js';
import { singleLoop } from './single-loop.js';

let installation: Installation;
let id: string;

beforeAll(async () => {
  build();
  installation = await Installation.start('embedded');
  id = await installation.submit(singleLoop());
  await installation.ended(id);
});
afterAll(() => installation.stop());

const at = (path: string): string => `${installation.client.server}/api/jobs/${id}/${path}`;

const post = (path: string, body: unknown): Promise<Response> =>
  fetch(at(path), {
    method: 'POST',
    headers: { 'content-type': 'application/json' },
    body: JSON.stringify(body),
  });

const mine = { 'TC-101': { gain: 1, integral: 7 } };

describe("settings of one's own", () => {
  it('are scored while typing on the models of the search, and in full on all', async () => {
    const quick = evaluationSchema.parse(await (await post('evaluate?models=search', mine)).json());
    const full = evaluationSchema.parse(await (await post('evaluate', mine)).json());
    expect(quick.scored.nominal).toEqual(full.scored.nominal);
    expect(quick.scored.objectives.speed).toBe(full.scored.objectives.speed);
    expect(quick.scored.objectives.robustness).toBeLessThanOrEqual(
      full.scored.objectives.robustness ?? 0,
    );
  });

  it('have the figures of an alternative when they are those of an alternative', async () => {
    const front = frontSchema.parse(JSON.parse(await installation.front(id)));
    const [first] = front.alternatives;
    const keeping = { name: 'as A01', person: 'unit engineer', settings: first?.settings };
    const answer = await post('own', keeping);
    expect(answer.status).toBe(201);
    const kept = ownSettingsSchema.parse(await answer.json());
    expect(kept).toMatchObject({
      id: 'U01',
      name: 'as A01',
      person: 'unit engineer',
      accepted: true,
    });
    expect(kept.settings).toEqual(first?.settings);
    expect(kept.nominal).toEqual(first?.nominal);
    expect(kept.verified.models).toBe(first?.verified.models);
  });

  it('are listed, have their own document, and can be proposed with a sheet', async () => {
    await post('own', { name: 'slower', person: 'unit engineer', settings: mine });
    const list = ownSettingsListSchema.parse(await (await fetch(at('own'))).json());
    const kept = list.own.find(({ name }) => name === 'slower');
    expect(kept?.settings['TC-101']).toMatchObject(mine['TC-101']);
    const detail = await (await fetch(at(`alternatives/${kept?.id}`))).json();
    expect(alternativeDetailSchema.parse(detail).scored.settings).toEqual(kept?.settings);
    const proposal = { alternative: kept?.id ?? '', person: 'unit engineer', reason: 'by hand' };
    const change = await installation.client.propose(id, proposal);
    const sheet = sheetSchema.parse(await installation.client.sheet(change.id));
    expect(sheet.loops[0]?.settings.map((s) => [s.setting, s.new])).toEqual([
      ['gain', 1],
      ['integral', 7],
    ]);
  });

  it('that are unstable are kept and not proposable', async () => {
    const wild = { 'TC-101': { gain: 40, integral: 0.5 } };
    const answer = await post('own', { name: 'wild', person: 'unit engineer', settings: wild });
    const kept = ownSettingsSchema.parse(await answer.json());
    expect(kept).toMatchObject({ stable: false, accepted: false });
    const proposed = await post('changes', { alternative: kept.id, person: 'x', reason: 'y' });
    expect(proposed.status).toBe(409);
    expect(problemSchema.parse(await proposed.json()).code).toBe('NOT_PROPOSABLE');
  });

  it('that name no loop of the unit are refused with their place', async () => {
    const settings = { 'TC-999': { gain: 1, integral: 7 } };
    const answer = await post('own', { name: 'lost', person: 'unit engineer', settings });
    expect(answer.status).toBe(422);
    const problem = problemSchema.parse(await answer.json());
    expect(problem.faults?.[0]?.path).toContain('TC-999');
  });
});
