import { stripVTControlCharacters } from 'node:util';
import { describe, expect, it } from 'vitest';
import {
  checkPage,
  colouredPaint,
  costLine,
  evaluationPage,
  frontPage,
  frontTable,
  type Paper,
  plainPaper,
} from '../../src/cli/index.js';
import { judgeLimits } from '../../src/cli/judged-limits.js';
import type { CheckReport, ScoredSettings } from '../../src/contract/index.js';
import type { Loose } from '../documents.js';
import {
  alternative,
  front,
  hash,
  job,
  livelier,
  metrics,
  scored,
  today,
} from './front-example.js';

const wide: Paper = { ...plainPaper, width: 140 };
const coloured: Paper = { width: 80, paint: colouredPaint };

const widest = (text: string): number => Math.max(...text.split('\n').map((line) => line.length));

describe('the page of a front', () => {
  it('fits 80 columns, and more only where there are more', () => {
    expect(widest(frontPage(front(), job, plainPaper))).toBeLessThanOrEqual(80);
    expect(widest(frontPage(front(), job, wide))).toBeGreaterThan(80);
  });

  it("holds today's settings, rules and alternatives to one yardstick", () => {
    const rows = frontTable(front(), plainPaper).split('\n');
    expect(rows.find((row) => row.includes('today'))).toMatch(/1\.00 .*1\.60/);
    expect(rows.find((row) => row.includes('SIMC'))).toMatch(/unstable$/);
    expect(rows.find((row) => row.includes('A01'))).toMatch(/0\.99 .*59 of 59$/);
    expect(rows.find((row) => row.includes('A02'))).toMatch(/58 of 59$/);
  });

  it("shows every change in the loop's own units with its ratio to today's", () => {
    const page = frontPage(front(), job, plainPaper);
    expect(page).toMatch(/today +TC-110 +1\.1 +%\/% +720 +s +60 +s +6 +s/);
    expect(page).toMatch(/LC-120 +0\.8 +%\/% +0\.05 +rep\/min/);
    expect(page).toMatch(/A02 +TC-110 +1\.32 +x1\.20/);
    expect(frontPage(front(), job, wide)).toMatch(/A02 +TC-110 +1\.1 -> +1\.32 +x1\.20/);
  });

  it('gives the ratio of the gain where a proportional band is dialled', () => {
    const banded = structuredClone(job) as Loose;
    banded.loops[0].controller.gainIn = 'proportional-band';
    expect(frontPage(front(), banded, plainPaper)).toMatch(/A02 +TC-110 +1\.32 +x0\.83 gain/);
  });

  it('says how averaging loops count, and claims no fresh models of an exact unit', () => {
    const legend = (changed: Loose) => frontPage(front(), changed, plainPaper).replace(/\s+/g, ' ');
    const exact = structuredClone(job) as Loose;
    exact.search.models = 1;
    exact.unit.operatingPoints = [];
    for (const loop of exact.loops) loop.goal = 'tight';
    expect(legend(exact)).not.toMatch(/never saw|confidence|Averaging|on any model/);
    exact.loops[1].goal = 'averaging';
    exact.search.models = 8;
    expect(legend(exact)).toMatch(/how fast they move their output.*never saw/);
  });

  it('leaves a loop out that no alternative changes', () => {
    expect(frontPage(front(), job, plainPaper)).not.toContain('PC-130');
  });

  it('prints changes of a long front evenly and says how many it leaves to the document', () => {
    const alternatives = Array.from({ length: 99 }, (_, k) => alternative(k + 1));
    const page = frontPage(front({ alternatives }), job, plainPaper);
    const changes = page.slice(page.indexOf('Settings, each'));
    expect(changes).toContain('A01');
    expect(changes).toContain('A99');
    expect(changes).toMatch(/\n {2}59 more are in the front document\./);
    expect(page.slice(0, page.indexOf('Settings, each'))).toContain('A50');
  });

  it('shows new settings alone where a loop has none today', () => {
    const bare = structuredClone(job) as Loose;
    delete bare.loops[0].present;
    const page = frontPage(front({ present: null, reference: 'SIMC' }), bare, plainPaper);
    expect(page).toContain('1.00 is as fast as SIMC');
    expect(page).toMatch(/today +TC-110 +- %\/% +- s/);
    expect(page).toMatch(/A02 +TC-110 +1\.32 +720/);
  });

  it('tells what stands in the way when nothing meets the limits', () => {
    const infeasible = {
      nearest: [scored(livelier(0.5), 2)],
      limits: [
        { limit: 'overshoot', loop: 'TC-110', asked: 1, reached: 4.2 },
        { limit: 'peakSingularValueS', loop: null, asked: 1.1, reached: null },
      ],
      words: ['TC-110: overshoot of at most 1 is asked, the nearest set gives 6.'],
    };
    const page = frontPage(front({ alternatives: [], binding: [], infeasible }), job, plainPaper);
    expect(page).toContain('No tuning meets the limits');
    expect(page).toContain('the nearest set gives 6.');
    expect(page).toMatch(/TC-110 +overshoot +1 +4\.2/);
    expect(page).toMatch(/unit +peak singular value of S +1\.1 +-/);
    expect(page).toMatch(/nearest +TC-110 +0\.55 +x0\.50/);
    expect(widest(page)).toBeLessThanOrEqual(80);
  });

  it('says the same with colours as without', () => {
    const page = frontPage(front(), job, coloured);
    expect(page).not.toBe(stripVTControlCharacters(page));
    expect(stripVTControlCharacters(page)).toBe(frontPage(front(), job, plainPaper));
  });

  it('counts what a job has spent in words', () => {
    const cost = { evaluations: 12_345, cpuSeconds: 150, wallSeconds: 75.4 };
    expect(costLine(cost, 2)).toBe(
      '12 345 tuning sets evaluated in 1 min 15 s on 2 threads, 2 min 30 s of processor time',
    );
  });
});

describe('the page of an evaluation', () => {
  const view = (set: ScoredSettings) => ({
    job,
    subject: "Today's settings",
    models: 2,
    assumed: ['no outputNoise limit for LC-120: a budget is taken'],
    verdicts: [
      {
        loop: 'TC-110',
        limit: 'overshoot',
        asked: 'at most 10 %',
        reached: '12 %',
        holds: false,
        nominal: false,
        stated: true,
      },
    ],
    evaluation: {
      format: 'heddle-evaluation/1' as const,
      job: hash,
      compute: hash,
      timeUnit: 'min' as const,
      horizon: 150,
      step: 0.01,
      reference: 'SIMC',
      warnings: [{ path: 'loops[0]', value: '1', problem: 'seldom meant' }],
      scored: set,
      responses: [],
    },
  });

  it('shows every closed loop nominal and worst, broken limits and warnings', () => {
    const page = evaluationPage(view(scored(today, 1)), plainPaper);
    expect(page).toMatch(/TC-110 +nominal +1\.60 +1\.10 +3\.10 +52 deg +1\.4 +0\.2 t\/h/);
    expect(page).toMatch(/1 of 1 broken/);
    expect(page).toMatch(/TC-110 +overshoot +at most 10 % +12 %/);
    expect(page).toContain('loops[0]: seldom meant (1)');
    expect(page).toMatch(/Assumed\n {2}- no outputNoise limit for LC-120/);
    expect(page.replace(/\s+/g, ' ')).toContain(
      'IAE is the sum over all upsets, each by its weight',
    );
    expect(page).toMatch(/LC-120 +-0\.50 +1\.50/);
    expect(widest(page)).toBeLessThanOrEqual(80);
  });

  it('holds a gain margin to the lesser of its two directions', () => {
    const set = scored(today, 1);
    set.worst.loops['TC-110'] = { ...metrics, gainMargin: 3.1, gainReduction: 0.5 };
    const loop = job.loops.findIndex(({ tag }) => tag === 'TC-110');
    const limit = { loop, quantity: 'gainMargin', bound: 2.5, nominal: false } as const;
    const [verdict] = judgeLimits([limit], job, view(set).evaluation);
    expect(verdict).toMatchObject({ reached: '2', holds: false });
  });

  it('names the horizon where a step has not settled, and one model as one', () => {
    const set = scored(today, 1);
    set.nominal.loops['TC-110'] = { ...metrics, settlingTime: null };
    const single = structuredClone(job) as Loose;
    single.search.models = 1;
    single.unit.operatingPoints = [];
    expect(evaluationPage({ ...view(set), job: single }, plainPaper)).toMatch(/12\.0 % +> 150 /);
    single.unit.operatingPoints = [{ name: 'low', responses: [] }];
    const page = evaluationPage({ ...view(set), job: single }, plainPaper);
    expect(page).toContain('2 models of the unit');
  });

  it('gives no figures of settings that are unstable, and says why', () => {
    const page = evaluationPage(view(scored(today, null)), plainPaper);
    expect(page).toContain('unstable on the nominal unit');
    expect(page).toContain('A speed of 1.00 would be that of SIMC.');
    expect(page).not.toContain('Loops: margins');
  });
});

describe('the page of a check', () => {
  const report: CheckReport = {
    job: hash,
    compute: hash,
    unit: {
      name: 'Unit',
      timeUnit: 'min',
      measurements: 2,
      actuators: 1,
      disturbances: 0,
      responses: 3,
      operatingPoints: 1,
    },
    loops: { retune: 1, keep: 1, manual: 1, averaging: 1, driven: 0 },
    upsets: { setpoint: 2, load: 1, disturbance: 0 },
    interaction: { rga: null, rgaLoops: ['A', 'B'], niederlinski: null },
    determinant: { models: 8, signChanges: 2 },
    run: {
      scan: 0.1,
      step: 0.05,
      searchStep: 0.2,
      searchError: 0.012,
      exact: false,
      horizon: 90,
      models: 8,
      limits: 4,
      settings: 5,
      alternatives: 24,
      effort: 'standard',
      seed: 1,
    },
    reference: 'SIMC',
    present: 'incomplete',
    assumed: [],
    warnings: [{ path: 'loops[0].present', value: 'nothing', problem: 'to be brought in' }],
    estimate: { seconds: 400, threads: 4 },
  };

  it('tells warnings, models that turn the steady state around, and about how long', () => {
    const page = checkPage(report, plainPaper);
    expect(page).toContain('loops[0].present: to be brought in (nothing)');
    expect(page).toContain('2 of 8 models turn the sign');
    expect(page).toContain('the gain matrix has no inverse');
    expect(page).toMatch(/takes +about 7 min on 4 threads/);
    expect(page).toContain('1.00 is as fast as SIMC');
    expect(widest(page)).toBeLessThanOrEqual(80);
  });

  it('is silent of what is not there', () => {
    const { loops, determinant } = report;
    const page = checkPage(
      {
        ...report,
        warnings: [],
        interaction: { rga: [[1]], rgaLoops: ['A'], niederlinski: 1 },
        determinant: { ...determinant, signChanges: 0 },
        loops: { ...loops, keep: 0, manual: 0, averaging: 0 },
      },
      plainPaper,
    );
    expect(page).not.toContain('Warnings');
    expect(page).not.toContain('relative gain');
    expect(page).not.toContain('turn the sign');
    expect(page).not.toContain('kept');
    expect(page).not.toContain('disturbance step');
  });
});
