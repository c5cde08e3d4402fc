import { describe, expect, it } from 'vitest';
import type { LoopMetrics, Metrics } from '../../src/contract/index.js';
import { loopFigures } from '../../src/web/alternative/loop-figures.js';
import { quietFrom } from '../../src/web/alternative/trend-span.js';
import { frontPoints } from '../../src/web/front/front-points.js';
import { frontWindow } from '../../src/web/front/front-window.js';
import { robustnessAxis, speedAxis } from '../../src/web/front/plane-axis.js';
import { roundWithin, scaleFor } from '../../src/web/parts/axis-range.js';
import { atLeastPercent, dialled, figure, percent } from '../../src/web/text/figures.js';
import { viewUnit } from '../../src/web/text/unit-view.js';
import { acceptedJob } from '../documents.js';
import { front, metrics as ordinary } from '../service/front-example.js';
import { singleLoop } from '../service/single-loop.js';

/** The figures of the single loop with some of them changed, and its limits as given. */
function rowsOf(change: Partial<LoopMetrics>, limits: object, goal?: 'averaging') {
  const written = singleLoop();
  const loops = written.loops.map((loop) => ({ ...loop, limits }));
  const [loop] = viewUnit(acceptedJob({ ...written, loops })).loops;
  if (loop === undefined) throw new Error('a job without loops');
  const unit = { stable: true } as Metrics['unit'];
  const scored = (figures: LoopMetrics) => {
    const metrics: Metrics = { loops: { [loop.tag]: figures }, unit };
    return { nominal: metrics, worst: metrics };
  };
  const view = { ...loop, averaging: goal === 'averaging' };
  const time = { timeUnit: 'min', horizon: 60 };
  const rows = loopFigures(view, scored(ordinary), [scored({ ...ordinary, ...change })], time);
  return (words: string) => {
    const row = rows.find((one) => one.words === words);
    return row === undefined ? undefined : { ...row, ...row.sets[0] };
  };
}

describe('the figures of a loop', () => {
  it('say a limit is exceeded only where it is', () => {
    const overshoot = (value: number) =>
      rowsOf({ overshoot: value }, { overshoot: 12 })('Overshoot')?.isBroken;
    expect([overshoot(11.9), overshoot(12), overshoot(12.1)]).toEqual([false, false, true]);
    const phase = (value: number) =>
      rowsOf({ phaseMargin: value }, { phaseMargin: 45 })('Phase margin')?.isBroken;
    expect([phase(44), phase(45), phase(60)]).toEqual([true, false, false]);
  });

  it('hold a limit on the gain margin upwards and downwards', () => {
    const margin = (gainReduction: number | null) =>
      rowsOf({ gainMargin: 3, gainReduction }, { gainMargin: 2 });
    expect(margin(null)('Gain margin')?.isBroken).toBe(false);
    expect(margin(0.4)('Gain margin')?.isBroken).toBe(false);
    expect(margin(0.6)('Gain margin')?.isBroken).toBe(true);
    expect(margin(0.6)('Gain reduction')?.shown?.[1]).toBe('0.600');
    expect(margin(null)('Gain reduction')).toBeUndefined();
  });

  it('say what has not settled in the time simulated, and that it breaks its limit', () => {
    const row = rowsOf({ settlingTime: null }, { settlingTime: 30 })('Settling time');
    expect(row?.shown).toEqual(['> 60.0', '> 60.0']);
    expect(row?.isBroken).toBe(true);
    // Without a setpoint step of its own nothing could settle.
    const still = rowsOf({ settlingTime: null, overshoot: null }, { settlingTime: 30 });
    expect(still('Settling time')).toMatchObject({ shown: ['\u2013', '\u2013'], isBroken: false });
  });

  it('call a figure better or worse by its own sense, and a swinging level neither', () => {
    const worse = rowsOf({ phaseMargin: 40, peakSensitivity: 2, peakDeviation: 3 }, {});
    const words = ['Phase margin', 'Peak sensitivity Ms', 'Peak deviation'];
    expect(words.map((name) => worse(name)?.verdict)).toEqual(['worse', 'worse', 'worse']);
    const better = rowsOf({ phaseMargin: 70, peakSensitivity: 1.2 }, {});
    expect(better('Phase margin')?.verdict).toBe('better');
    expect(better('Peak sensitivity Ms')?.verdict).toBe('better');
    expect(better('Overshoot')?.verdict).toBe('alike');
    expect(rowsOf({ peakDeviation: 3 }, {}, 'averaging')('Peak deviation')?.verdict).toBeNull();
  });

  it('show a margin without end as such', () => {
    expect(rowsOf({ gainMargin: null }, {})('Gain margin')?.shown).toEqual(['\u221e', '\u221e']);
  });
});

describe('numbers on the page', () => {
  it('have three significant digits, zeros at the end included', () => {
    const shown = [1, 0.5, 12.345, 1234.5, 123456, -0.04, 0.00001234, 0, null].map((value) =>
      figure(value),
    );
    const thin = '\u2009';
    expect(shown).toEqual([
      '1.00',
      '0.500',
      '12.3',
      '1230',
      `123${thin}000`,
      '\u22120.0400',
      '1.23e\u22125',
      '0',
      '\u2013',
    ]);
  });

  it('are dialled with all their digits', () => {
    expect([0.0218, 1234.5678, -4, 0.1 + 0.2].map((value) => dialled(value))).toEqual([
      '0.0218',
      '1234.5678',
      '\u22124',
      '0.3',
    ]);
  });

  it('never promise more than is known', () => {
    expect(atLeastPercent(0.95999)).toBe('95.9\u2009%');
    expect(percent(0.999)).toBe('99\u2009%');
    expect(percent(1)).toBe('100\u2009%');
  });
});

describe('the plane of the front', () => {
  it('holds every alternative and today, and tells of what lies beyond', () => {
    const document = front();
    const points = frontPoints(document);
    const plane = frontWindow(points, { x: robustnessAxis, y: speedAxis('today') });
    const drawn = plane.inside.map(({ point }) => point.key);
    for (const { id } of document.alternatives) expect(drawn).toContain(id);
    const told = [
      ...[...plane.inside, ...plane.beyond].map(({ point }) => point.key),
      ...[...plane.unstable, ...plane.without].map(({ key }) => key),
    ];
    expect(told.toSorted()).toEqual(points.map(({ key }) => key).toSorted());
    for (const { x, y, worstY } of plane.inside) {
      expect(x).toBeGreaterThanOrEqual(plane.x.low);
      expect(x).toBeLessThanOrEqual(plane.x.high);
      expect(y).toBeGreaterThanOrEqual(plane.y.low);
      expect(Math.max(y, worstY ?? 0)).toBeLessThanOrEqual(plane.y.high);
    }
  });

  it('has scales that hold their range and are marked at round numbers', () => {
    const scale = scaleFor([0.23, 1.07], 6);
    expect(scale).toEqual({ low: 0.2, high: 1.2, step: 0.2 });
    expect(roundWithin([-0.23, 0.71], 4)).toEqual([0, 0.5]);
  });
});

describe('the time shown of a response', () => {
  it('ends once nothing of note happens any more', () => {
    const time = Array.from({ length: 101 }, (_, k) => k);
    const trend = (pv: number[]) => ({
      kind: 'load' as const,
      tag: 'TC-101',
      time,
      loops: { 'TC-101': { pv, sp: time.map(() => 0), op: time.map(() => 0) } },
    });
    expect(quietFrom([trend(time.map((t) => Math.exp(-t / 2)))])).toBe(1 / 8);
    expect(quietFrom([trend(time.map((t) => Math.sin(t)))])).toBe(1);
  });
});
