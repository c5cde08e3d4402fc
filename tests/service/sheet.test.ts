import { createHash } from 'node:crypto';
import canonicalize from 'canonicalize';
import { describe, expect, it } from 'vitest';
import { plainPaper } from '../../src/cli/index.js';
import { sheetPage } from '../../src/cli/tables/sheet-page.js';
import {
  type ChangeRecord,
  type FrontDocument,
  type JobDocument,
  type LoopMetrics,
  type SheetDocument,
  type SheetLoop,
  sheetSchema,
} from '../../src/contract/index.js';
import { changeSheet } from '../../src/service/change-sheet.js';
import type { Loose } from '../documents.js';
import { front, hash, job, metrics, scored, today } from './front-example.js';

const proposed = {
  person: 'Shift engineer',
  reason: 'calmer columns',
  at: '2026-03-01T08:00:00.000Z',
};
const approved = { ...proposed, person: 'Area lead', reason: 'reviewed' };

function change(changes: Partial<ChangeRecord> = {}): ChangeRecord {
  return {
    id: 'C000000000001',
    job: 'J000000000001',
    unitName: job.unit.name,
    alternative: 'A02',
    state: 'approved',
    jobHash: hash,
    frontHash: hash,
    detailHash: hash,
    proposed,
    decided: approved,
    ...changes,
  };
}

interface Variation {
  readonly job?: JobDocument;
  readonly front?: FrontDocument;
  readonly change?: Partial<ChangeRecord>;
}

const sheetOf = (variation: Variation = {}): SheetDocument =>
  sheetSchema.parse(
    changeSheet({
      job: variation.job ?? job,
      front: variation.front ?? front(),
      change: change(variation.change),
    }),
  );

/** The job, front or sheet with one change made to it. */
function varied<Document>(document: Document, vary: (loose: Loose) => void): Document {
  const copy = structuredClone(document);
  vary(copy);
  return copy;
}

function loopOf(sheet: SheetDocument, tag: string): SheetLoop {
  const loop = sheet.loops.find((other) => other.tag === tag);
  if (loop === undefined) throw new Error(`no loop ${tag} on the sheet`);
  return loop;
}

const settingOf = (sheet: SheetDocument, tag: string, name: string) =>
  loopOf(sheet, tag).settings.find(({ setting }) => setting === name);

const figureOf = (sheet: SheetDocument, tag: string, key: string) =>
  loopOf(sheet, tag).expectations.find((expectation) => expectation.key === key);

/** A text without its line breaks. */
const flat = (text: string): string => text.replace(/\s+/g, ' ');

describe('the settings on a change sheet', () => {
  it("stand old beside new in the controller's own terms and units", () => {
    const sheet = sheetOf();
    expect(settingOf(sheet, 'TC-110', 'gain')).toMatchObject({ unit: '%/%', old: 1.1 });
    expect(settingOf(sheet, 'TC-110', 'gain')?.new).toBeCloseTo(1.32, 12);
    expect(settingOf(sheet, 'TC-110', 'integral')).toMatchObject({ unit: 's', old: 720, new: 720 });
    expect(settingOf(sheet, 'LC-120', 'integral')).toMatchObject({ unit: 'rep/min', old: 0.05 });
    expect(settingOf(sheet, 'PC-130', 'gain')).toMatchObject({ unit: '% band', old: -120 });
    expect(loopOf(sheet, 'LC-120')).toMatchObject({
      action: 'direct',
      controller: expect.stringContaining('PI, series form'),
    });
  });

  it('are called as they are dialled, with what a move does to the action', () => {
    const wider = varied(front(), (loose) => {
      loose.alternatives[1].settings['PC-130'] = { gain: -240, integral: 2 };
    });
    const band = settingOf(sheetOf({ front: wider }), 'PC-130', 'gain');
    expect(band).toMatchObject({ name: 'proportional band', effect: 'weaker, 0.5 x' });
    const integral = settingOf(sheetOf(), 'LC-120', 'integral');
    expect(integral).toMatchObject({ name: 'integral rate', effect: 'unchanged' });
  });

  it('come in an order that changes an inner loop before the loop that drives it', () => {
    expect(sheetOf().loops.map(({ tag }) => tag)).toEqual(['FC-111', 'TC-110', 'LC-120', 'PC-130']);
    expect(loopOf(sheetOf(), 'TC-110').drives).toBe('setpoint of FC-111');
  });

  it('say which loops stay as they are', () => {
    const unchanged = sheetOf().loops.filter(({ changes }) => !changes);
    expect(unchanged.map(({ tag, task }) => [tag, task])).toEqual([['PC-130', 'keep']]);
    expect(flat(sheetPage(sheetOf(), plainPaper))).toMatch(/Unchanged PC-130 kept/);
  });

  it('have no old value where a loop stands in manual today, and manual is the way back', () => {
    const bare = varied(job, (loose) => {
      delete loose.loops[0].present;
    });
    const sheet = sheetOf({ job: bare, front: front({ present: null, reference: 'SIMC' }) });
    expect(sheet.today).toBeNull();
    expect(settingOf(sheet, 'TC-110', 'gain')?.old).toBeNull();
    expect(loopOf(sheet, 'TC-110').notes.join()).toContain('the way back is manual');
    expect(sheet.cautions.join('\n')).toContain('no old settings for TC-110');
    expect(flat(sheetPage(sheet, plainPaper))).toMatch(/gain %\/% - 1\.32 in manual today/);
  });

  it('take a setting that is left out for zero, so that taking a filter away is a change', () => {
    const bare = varied(front(), (loose) => {
      delete loose.alternatives[1].settings['TC-110'].filter;
    });
    expect(settingOf(sheetOf({ front: bare }), 'TC-110', 'filter')).toMatchObject({
      old: 6,
      new: 0,
    });
  });

  it('are printed with every digit that was verified', () => {
    const fine = varied(front(), (loose) => {
      loose.alternatives[1].settings['TC-110'].integral = 712.345;
    });
    expect(sheetPage(sheetOf({ front: fine }), plainPaper)).toMatch(
      /720 +712\.345 +stronger, 1\.01 x/,
    );
  });

  it('name no setting of a loop that stays in manual', () => {
    const manual = varied(job, (loose) => {
      loose.loops[3].task = 'manual';
    });
    const loop = loopOf(sheetOf({ job: manual }), 'PC-130');
    expect(loop).toMatchObject({ settings: [], expectations: [], changes: false, task: 'manual' });
  });
});

describe('what a change sheet lets expect', () => {
  const lively: LoopMetrics = { ...metrics, peakSensitivity: 1.9, gainMargin: null };
  const different = varied(front(), (loose) => {
    loose.alternatives[1].nominal.loops['TC-110'] = metrics;
    loose.alternatives[1].worst.loops['TC-110'] = lively;
    loose.alternatives[1].worst.loops['FC-111'] = { ...metrics, settlingTime: null };
  });

  it('is today beside the new settings, nominal and worst, for every loop', () => {
    const sheet = sheetOf({ front: different });
    expect(figureOf(sheet, 'TC-110', 'peakSensitivity')).toMatchObject({
      today: 1.6,
      todayWorst: 1.6,
      expected: 1.6,
      expectedWorst: 1.9,
    });
    expect(figureOf(sheet, 'TC-110', 'outputNoise')?.unit).toBe('t/h');
    expect(figureOf(sheet, 'LC-120', 'peakDeviation')?.unit).toBe('%');
    expect(sheet.objectives.map(({ key, expected }) => [key, expected])).toEqual([
      ['speed', 0.98],
      ['robustness', null],
    ]);
  });

  it('tells a margin without end from a step that does not settle', () => {
    const text = sheetPage(sheetOf({ front: different }), plainPaper);
    expect(text).toMatch(/gain margin, upwards +3\.1 +3\.1 +3\.1 +inf/);
    expect(text).toMatch(/settling time of the setpoint step +min +9 +9 +9 +> 150/);
  });

  it('claims no figures of settings that are unstable today', () => {
    const sheet = sheetOf({ front: front({ present: { ...scored(today, null), detail: hash } }) });
    expect(sheet.today).toEqual({ stable: false, unstableModels: 3 });
    const text = sheetPage(sheet, plainPaper);
    expect(flat(text)).toContain("Today's settings are unstable.");
    expect(text).toMatch(/gain margin, upwards +- +- +3\.1 +3\.1/);
  });

  it('leaves out overshoot and settling of a loop whose setpoint is not stepped', () => {
    const still = varied(job, (loose) => {
      loose.loops[0].setpointStep = 0;
    });
    expect(figureOf(sheetOf({ job: still }), 'TC-110', 'settlingTime')).toBeUndefined();
    expect(figureOf(sheetOf(), 'TC-110', 'settlingTime')).toBeDefined();
  });

  it('shows how fast an averaging loop moves its output', () => {
    expect(figureOf(sheetOf(), 'LC-120', 'peakRate')).toMatchObject({ unit: '%/min' });
    expect(figureOf(sheetOf(), 'TC-110', 'peakRate')).toBeUndefined();
  });
});

describe('the cautions of a change sheet', () => {
  it('keep safety functions out, people in charge and name what is not checked', () => {
    const text = sheetOf().cautions.join('\n');
    for (const words of [
      'IEC 61511',
      'writes to no control system',
      'management of change',
      'local codes',
      'licensed practice',
      'one loop at a time',
      'does not check the states in between',
      'without a bump',
      'who watches and for how long',
      'what stops the change',
      'The way back is the old settings',
    ]) {
      expect(text).toContain(words);
    }
  });

  it('forbid to dial from a sheet that is not approved', () => {
    const first = (state: ChangeRecord['state']) => sheetOf({ change: { state } }).cautions[0];
    expect(first('proposed')).toMatch(/not approved: dial nothing/);
    expect(first('rejected')).toMatch(/rejected: dial nothing/);
    expect(first('approved')).not.toContain('dial nothing');
    const text = sheetPage(sheetOf({ change: { state: 'proposed', decided: null } }), plainPaper);
    expect(text).toContain('PROPOSED, NOT APPROVED');
  });

  it('say of a unit taken as exact that nothing is known beside it', () => {
    const exact = varied(job, (loose) => {
      loose.search.models = 1;
    });
    expect(sheetOf({ job: exact }).cautions.join('\n')).toContain('taken as exact');
    expect(sheetOf().cautions.join('\n')).not.toContain('taken as exact');
  });

  it('tell of verification models that broke a limit', () => {
    expect(sheetOf().cautions.join('\n')).toContain(
      'Of 59 verification models, all stable, 1 broke',
    );
    expect(sheetOf({ change: { alternative: 'A01' } }).cautions.join('\n')).not.toContain('Of 59');
  });

  it('name the loop without which the rest is unstable, and those an inner loop opens', () => {
    const needed = varied(front(), (loose) => {
      loose.alternatives[1].nominal.loops['FC-111'].stableInManual = false;
    });
    const { notes } = loopOf(sheetOf({ front: needed }), 'FC-111');
    expect(notes.join('\n')).toContain('With FC-111 in manual TC-110 cannot act either.');
    expect(notes.join('\n')).toMatch(/FC-111 must not be left in manual.*the new settings/);
    expect(loopOf(sheetOf(), 'TC-110').notes).toEqual([]);
  });
});

describe('a change sheet as a document', () => {
  it('carries the hash of everything else in it', () => {
    const { hash: stated, ...rest } = sheetOf();
    const canonical = canonicalize(rest) as string;
    expect(stated).toBe(createHash('sha256').update(canonical).digest('hex'));
  });

  it('is the same for the same change, and another once it has been decided', () => {
    expect(sheetOf()).toEqual(sheetOf());
    const before = sheetOf({ change: { state: 'proposed', decided: null } });
    expect(before.hash).not.toBe(sheetOf().hash);
  });

  it('refuses an alternative that the front does not have', () => {
    expect(() => sheetOf({ change: { alternative: 'A77' } })).toThrow(
      expect.objectContaining({ code: 'ALTERNATIVE_UNKNOWN' }),
    );
  });

  it('fits 80 columns on paper and shows who signed, when and why', () => {
    const text = sheetPage(sheetOf(), plainPaper);
    for (const line of text.split('\n')) expect(line.length).toBeLessThanOrEqual(80);
    expect(flat(text)).toContain('approved by Area lead, 2026-03-01T08:00:00.000Z: reviewed');
    expect(text.match(/dialled by __/g)).toHaveLength(3);
  });
});
