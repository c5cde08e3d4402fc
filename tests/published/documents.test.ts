import { describe, expect, it } from 'vitest';
import { describeInteraction } from '../../src/frequency/index.js';
import { readUpsetFigures } from '../../src/scoring/upset-figures.js';
import type { Upset } from '../../src/simulation/index.js';
import { analyse, offBy, simulate } from './circuit.js';
import { type Document, type ExpectedText, readDocument } from './documents.js';

/**
 * The present settings of four units against figures computed apart from this code with numpy and
 * scipy: exact zero-order-hold sampling, frequency figures of the sampled loop on 60,000 points.
 * Agreed: 0.5 % on IAE, travel, peaks, gain margin and singular value, half a point of overshoot, one
 * scan of settling time, one degree of phase margin, 2 % of noise.
 */
describe.each([
  'wood-berry-blt',
  'ogunnaike-ray-blt',
  'single-inverse-response',
  'single-pid-fractional-delay',
])('%s', (name) => {
  const document = readDocument(name);
  const { circuit, expected, job, paths } = document;

  it('moves as computed elsewhere in every upset', () => {
    for (const upset of expected.upsets) {
      const trajectory = simulate(circuit, upsetOf(document, upset), job.unit.horizon);
      job.loops.forEach((loop, i) => {
        const own = upset.kind === 'setpoint' && upset.tag === loop.tag ? loop.setpointStep : 0;
        const figures = readUpsetFigures(trajectory, i, own, loop.tolerance, circuit.scan);
        const wanted = upset.loops[loop.tag];
        expect(offBy(figures.iae, wanted?.iae ?? 0)).toBeLessThan(0.005);
        expect(offBy(figures.travel, wanted?.travel ?? 0)).toBeLessThan(0.005);
        expect(offBy(figures.peakDeviation, wanted?.peakDeviation ?? 0)).toBeLessThan(0.005);
        const end = trajectory.pv[i]?.at(-1) ?? Number.NaN;
        expect(Math.abs(end - (upset.final[i] ?? 0))).toBeLessThan(1e-4);
        if (own === 0) return;
        expect(Math.abs((figures.overshoot ?? 100) - (wanted?.overshoot ?? 0))).toBeLessThan(0.5);
        const late = Math.abs((figures.settlingTime ?? Infinity) - (wanted?.settlingTime ?? 0));
        expect(late).toBeLessThan(circuit.scan * (1 + 1e-6));
      });
    }
  });

  it('has the peaks, margins and noise computed elsewhere', () => {
    const noise = job.unit.measurements.map((m) => m.noise);
    const spans = job.unit.measurements.map((m) => m.high - m.low);
    const figures = analyse(circuit, noise, spans);
    expect(figures.stability.decided).toBe(true);
    expect(figures.stability.unstable).toBeLessThan(1);
    expect(offBy(figures.peakSingularValueS, expected.unit.peakSingularValueS)).toBeLessThan(0.005);
    job.loops.forEach((loop, i) => {
      const got = figures.loops[i];
      const wanted = expected.loops[loop.tag];
      expect(offBy(got?.peakSensitivity ?? null, wanted?.peakSensitivity ?? 0)).toBeLessThan(0.005);
      expect(offBy(got?.peakComplementary ?? null, wanted?.peakComplementary ?? 0)).toBeLessThan(
        0.005,
      );
      expect(offBy(got?.gainMargin ?? null, wanted?.gainMargin ?? 0)).toBeLessThan(0.005);
      expect(Math.abs((got?.phaseMargin ?? 0) - (wanted?.phaseMargin ?? 0))).toBeLessThan(1);
      expect(offBy(got?.outputNoise ?? null, wanted?.outputNoise ?? 0)).toBeLessThan(0.02);
      expect(offBy(got?.outputNoiseOwn ?? null, wanted?.outputNoiseOwn ?? 0)).toBeLessThan(0.02);
    });
  });

  it('has the relative gains computed elsewhere', () => {
    const { relativeGains } = describeInteraction(paths, circuit.network);
    expected.rga.forEach((row, i) => {
      row.forEach((value, j) => {
        expect(relativeGains?.[i]?.[j]).toBeCloseTo(value, 9);
      });
    });
  });
});

function upsetOf({ job, sources }: Document, { kind, tag }: ExpectedText['upsets'][number]): Upset {
  if (kind === 'disturbance') {
    const size = job.unit.disturbances.find((d) => d.tag === tag)?.step ?? 0;
    return { kind, source: sources.indexOf(tag), size, opened: [] };
  }
  const loop = job.loops.findIndex((l) => l.tag === tag);
  return { kind, loop, size: job.loops[loop]?.setpointStep ?? 0, opened: [] };
}
