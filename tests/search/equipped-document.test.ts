import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { type EvaluationDocument, evaluationSchema, readJob } from '../../src/contract/index.js';
import { compileJob, evaluateSettings, prepareJob, Workbench } from '../../src/study/index.js';
import type { Loose } from '../documents.js';

const demo = readFileSync(new URL('../../src/demo/machine-hall-cooling.json', import.meta.url));

/** The demonstration plant with its unit taken as exact and an edit, evaluated as it runs today. */
function evaluate(edit: (job: Loose) => void): EvaluationDocument {
  const document = JSON.parse(demo.toString());
  document.search.models = 1;
  edit(document);
  const read = readJob(JSON.stringify(document));
  if (!read.ok) throw new TypeError(JSON.stringify(read.faults));
  const compiled = compileJob(read.job);
  const bench = new Workbench(compiled, prepareJob(compiled));
  const provenance = { job: '0'.repeat(64), compute: 'test' };
  return evaluateSettings(bench, compiled.space.base, provenance, read.warnings);
}

const plain = evaluate(() => {});

describe('a document with dead bands and resolutions', () => {
  const sticky = evaluate((job) => {
    for (const actuator of job.unit.actuators)
      Object.assign(actuator, { deadband: 0.5, resolution: 1 });
  });
  const tags = Object.keys(plain.scored.nominal.loops);

  it('keeps the speed of the run without them, and shows that with them beside it', () => {
    expect(evaluationSchema.parse(sticky)).toEqual(sticky);
    expect(sticky.scored.objectives).toEqual(plain.scored.objectives);
    expect(sticky.scored.nominal.unit.speed).toBe(plain.scored.nominal.unit.speed);
    expect(sticky.scored.nominal.unit.speedWithActuators).toBeGreaterThan(1.05);
    for (const tag of tags) {
      const [own, before] = [sticky.scored.nominal.loops[tag], plain.scored.nominal.loops[tag]];
      expect(own?.iae).toBe(before?.iae);
      expect(own?.iaeWithActuators).not.toBe(own?.iae);
      expect(own?.peakSensitivity).toBe(before?.peakSensitivity);
    }
  });

  it('is held to its limits, and shown, with them', () => {
    const pick = ({ scored }: EvaluationDocument) =>
      tags.map((t) => scored.nominal.loops[t]?.travel);
    expect(pick(sticky)).not.toEqual(pick(plain));
    expect(sticky.responses).not.toEqual(plain.responses);
    // The last of a loop's travel that the dead band swallows leaves its PV off the setpoint for longer.
    const upset = sticky.scored.nominal.upsets?.[0];
    expect(upset?.loops['TC-10']?.iaeWithActuators).toBeGreaterThan(
      upset?.loops['TC-10']?.iae ?? 0,
    );
  });

  it('says which loops cycle', () => {
    for (const tag of tags) {
      const cycle = sticky.scored.nominal.loops[tag]?.limitCycle;
      expect(cycle).toBeDefined();
      if (cycle) expect(Math.min(cycle.amplitude, cycle.period)).toBeGreaterThan(0);
    }
    expect(tags.some((tag) => sticky.scored.nominal.loops[tag]?.limitCycle)).toBe(true);
  });

  it('of no actuator that has one says nothing of any of it', () => {
    const unit = Object.keys(plain.scored.nominal.unit);
    expect(unit).not.toContain('speedWithActuators');
    expect(Object.keys(plain.scored.worst.loops['TC-10'] ?? {})).not.toContain('limitCycle');
  });
});

describe('a document with feedforward of a disturbance', () => {
  const fed = evaluate((job) => {
    job.loops[0].feedforward = [{ from: 'HEAT-LOAD', gain: 0.2, lead: 5, lag: 20, deadTime: 2.5 }];
  });

  it('differs in the upset of that disturbance and in no other, nor in any margin', () => {
    const upsets = ({ scored }: EvaluationDocument) => scored.nominal.upsets ?? [];
    upsets(fed).forEach((upset, u) => {
      if (upset.tag === 'HEAT-LOAD') expect(upset).not.toEqual(upsets(plain)[u]);
      else expect(upset).toEqual(upsets(plain)[u]);
    });
    for (const [tag, own] of Object.entries(fed.scored.nominal.loops)) {
      const before = plain.scored.nominal.loops[tag];
      expect(own.peakSensitivity).toBe(before?.peakSensitivity);
      expect(own.outputNoise).toBe(before?.outputNoise);
    }
  });
});
