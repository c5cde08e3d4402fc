import { describe, expect, it } from 'vitest';
import { changedJob, changesOf } from '../../src/web/again/changed-job.js';
import { filteredOut } from '../../src/web/front/filter.js';
import { frontPoints } from '../../src/web/front/front-points.js';
import { robustnessAxis, speedAxis } from '../../src/web/front/plane-axis.js';
import { limitRooms } from '../../src/web/limits/limit-room.js';
import { nudged, numberIn, stepOf } from '../../src/web/own/draft.js';
import { viewUnit } from '../../src/web/text/unit-view.js';
import { acceptedJob } from '../documents.js';
import { front, metrics, scored } from '../service/front-example.js';
import { singleLoop } from '../service/single-loop.js';

describe('a number that is nudged', () => {
  it('moves by the step of its controller, or by a unit of its third digit', () => {
    expect([stepOf(2.04, null), stepOf(0.0818, null), stepOf(140, null)]).toEqual([0.01, 1e-4, 1]);
    expect(nudged(2.04, 1, null, false)).toBe(2.05);
    expect(nudged(0.0818, -10, null, false)).toBe(0.0808);
    expect(nudged(2.04, 1, 0.25, false)).toBe(2.25);
    expect(nudged(1, -1, null, false)).toBe(0.99);
    expect(nudged(-4, 1, null, false)).toBe(-3.99);
  });

  it('never loses its sign, and turns a derivative off at most', () => {
    expect(nudged(0.5, -1, 0.5, false)).toBe(0.5);
    expect(nudged(0.5, -10, 0.5, true)).toBe(0);
    expect(nudged(0, -1, null, true)).toBe(0);
    expect(nudged(0, 1, null, true)).toBe(0.01);
  });

  it('is read as it is written, and not where it is unclear', () => {
    expect(['0.25', '\u22121.5', ' .5 ', '2e-3'].map(numberIn)).toEqual([0.25, -1.5, 0.5, 0.002]);
    expect(['', '1,5', '1e999', '0x10', '5 min'].map(numberIn)).toEqual(Array(5).fill(null));
  });
});

/** A single loop with limits, and made-up figures for it. */
function roomsOf(limits: object, figures: object) {
  const written = singleLoop();
  const loops = written.loops.map((loop) => ({ ...loop, limits }));
  const unit = viewUnit(acceptedJob({ ...written, loops }));
  const set = scored({ 'TC-101': { gain: 1, integral: 8 } }, 0.5);
  const measured = { ...set.worst, loops: { 'TC-101': { ...metrics, ...figures } } };
  return limitRooms(unit, { nominal: measured, worst: measured, stable: true }, 60);
}

describe('the room up to a limit', () => {
  it('is a share of the limit, and the tightest comes first', () => {
    const limits = { overshoot: 16, gainMargin: 2, peakSensitivity: 2 };
    const rooms = roomsOf(limits, { overshoot: 12, gainMargin: 3, peakSensitivity: 1.8 });
    expect(rooms.map(({ words }) => words)).toEqual([
      'peak sensitivity Ms',
      'overshoot',
      'gain margin',
    ]);
    expect(rooms.map(({ room }) => room)).toEqual([
      expect.closeTo(0.1, 9),
      expect.closeTo(0.25, 9),
      expect.closeTo(0.5, 9),
    ]);
    expect(rooms.map(({ isBroken }) => isBroken)).toEqual([false, false, false]);
  });

  it('is less than none where the limit is broken, and without end where no margin is', () => {
    const [broken, endless] = roomsOf(
      { overshoot: 10, gainMargin: 2 },
      { overshoot: 12, gainMargin: null },
    );
    expect(broken).toMatchObject({ words: 'overshoot', isBroken: true });
    expect(broken?.room).toBeCloseTo(-0.2, 9);
    expect(endless).toMatchObject({ words: 'gain margin', isBroken: false, room: Infinity });
  });

  it('counts limits that the job does not state but that hold', () => {
    const assumed = [{ loop: 'TC-101', limit: 'outputNoise', bound: 0.4 }] as const;
    const unit = viewUnit(acceptedJob(singleLoop()), assumed);
    const set = scored({ 'TC-101': { gain: 1, integral: 8 } }, 0.5);
    const noise = limitRooms(unit, set, 60).find(({ words }) => words === 'output noise');
    expect(noise).toMatchObject({ isStated: false, isBroken: false, room: 0.5 });
  });
});

describe('a filter', () => {
  it('leaves out what is beyond its bound, and neither today nor the rules', () => {
    const points = frontPoints(front());
    const out = filteredOut(points, [{ axis: speedAxis('today'), bound: 0 }]);
    expect([...out]).toEqual(front().alternatives.map(({ id }) => id));
    expect(filteredOut(points, [{ axis: robustnessAxis, bound: 9 }]).size).toBe(0);
  });
});

describe('a job made from another', () => {
  it('is the same but for what was changed', () => {
    const written = singleLoop();
    const changes = changesOf(written);
    expect(changes.limits).toMatchObject([{ name: 'peakSensitivity', text: '2', before: 2 }]);
    const limits = [
      { loop: 0, name: 'peakSensitivity', text: '1.6', isNominal: false, before: 2 },
      { loop: 0, name: 'gainMargin', text: '3', isNominal: true, before: null },
      { loop: 0, name: 'overshoot', text: ' ', isNominal: false, before: null },
    ] as const;
    const changed = changedJob(written, { ...changes, limits, seed: '7' });
    expect(changed).toEqual({
      ...written,
      loops: written.loops.map((loop) => ({
        ...loop,
        limits: { peakSensitivity: 1.6, gainMargin: { min: 3, nominal: true } },
      })),
      search: { ...written.search, effort: 'quick', seed: 7 },
    });
    acceptedJob(changed as typeof written);
  });
});
