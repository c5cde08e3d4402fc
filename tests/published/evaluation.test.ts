import { readFileSync } from 'node:fs';
import { describe, expect, it } from 'vitest';
import { evaluationSchema, readJob } from '../../src/contract/index.js';
import { compileJob, evaluateSettings, prepareJob, Workbench } from '../../src/study/index.js';

/**
 * `evaluate`, from the document's bytes to its answer, against figures computed apart from this code
 * with numpy and scipy (exact zero-order-hold sampling, frequency figures on 60,000 points).
 * Tolerances as agreed: 0.5 % on IAE, travel, peaks, gain margin, singular value; half a point of
 * overshoot; one scan of settling time; one degree of phase margin; 2 % of noise.
 */
const documents = [
  ['wood-berry-blt', 'R. K. Wood, M. W. Berry, Chem. Eng. Sci. 28 (1973) 1707; W. L. Luyben 1986'],
  ['ogunnaike-ray-blt', 'B. A. Ogunnaike et al., AIChE J. 29 (1983) 632; W. L. Luyben 1986'],
  ['single-inverse-response', 'invented'],
  ['single-pid-fractional-delay', 'invented'],
] as const;

const relative = 0.005;
const tolerances: { readonly [figure: string]: (wanted: number, scan: number) => number } = {
  overshoot: () => 0.5,
  settlingTime: (_, scan) => scan * (1 + 1e-9),
  phaseMargin: () => 1,
  outputNoise: (wanted) => 0.02 * wanted,
  outputNoiseOwn: (wanted) => 0.02 * wanted,
};

describe.each(documents)('%s (%s)', (name) => {
  const read = (kind: string): Buffer =>
    readFileSync(new URL(`./data/${name}.${kind}.json`, import.meta.url));
  const expected = JSON.parse(read('expected').toString());
  const job = readJob(read('job'));
  if (!job.ok) throw new TypeError(`${name} is not accepted`);
  const compiled = compileJob(job.job);
  const bench = new Workbench(compiled, prepareJob(compiled));
  const provenance = { job: '0'.repeat(64), compute: 'test' };
  const answer = evaluateSettings(bench, compiled.space.base, provenance, job.warnings);
  const scan = job.job.loops[0]?.controller.scan ?? 0;

  const agree = (figure: string, got: unknown, wanted: number): void => {
    const tolerance = tolerances[figure]?.(wanted, scan) ?? relative * Math.abs(wanted);
    expect(got, figure).toBeTypeOf('number');
    expect(Math.abs((got as number) - wanted), figure).toBeLessThanOrEqual(tolerance + 1e-9);
  };

  it('answers in the shape of its schema', () => {
    expect(evaluationSchema.safeParse(answer).error).toBeUndefined();
  });

  it('agrees in every figure of every upset', () => {
    for (const upset of expected.upsets) {
      const own = answer.scored.nominal.upsets?.find(
        (u) => u.kind === upset.kind && u.tag === upset.tag,
      );
      for (const [tag, figures] of Object.entries<Record<string, number>>(upset.loops)) {
        const got = own?.loops[tag] as Record<string, unknown> | undefined;
        for (const [figure, wanted] of Object.entries(figures))
          agree(figure, got?.[figure], wanted);
      }
    }
  });

  it('agrees in margins, peaks and noise of every loop and in the unit as a whole', () => {
    for (const [tag, figures] of Object.entries<Record<string, number>>(expected.loops)) {
      const got = answer.scored.nominal.loops[tag] as Record<string, unknown> | undefined;
      for (const [figure, wanted] of Object.entries(figures)) agree(figure, got?.[figure], wanted);
    }
    const { unit } = answer.scored.nominal;
    agree('peakSingularValueS', unit.peakSingularValueS, expected.unit.peakSingularValueS);
    expected.rga.forEach((row: number[], i: number) => {
      row.forEach((wanted, j) => {
        agree('rga', unit.rga?.[i]?.[j], wanted);
      });
    });
  });
});

// E is the plain sum of all absolute errors, and Ms the larger of both, of the same calculation.
describe('the Wood-Berry column at the BLT settings', () => {
  it('has the error 90.77 at a peak sensitivity of 1.510 that fronts are compared with', () => {
    const job = readJob(readFileSync(new URL('./data/wood-berry-blt.job.json', import.meta.url)));
    if (!job.ok) throw new TypeError('the document is not accepted');
    const compiled = compileJob(job.job);
    const bench = new Workbench(compiled, prepareJob(compiled));
    const provenance = { job: '0'.repeat(64), compute: 'test' };
    const { scored } = evaluateSettings(bench, compiled.space.base, provenance, []);
    const errors = scored.nominal.upsets?.flatMap((u) => Object.values(u.loops).map((l) => l.iae));
    const total = errors?.reduce<number>((sum, iae) => sum + (iae ?? Number.NaN), 0);
    expect(total).toBeCloseTo(90.77, 1);
    expect(scored.objectives.robustness).toBeCloseTo(1.51, 3);
  });
});
