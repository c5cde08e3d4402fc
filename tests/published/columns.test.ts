import { describe, expect, it } from 'vitest';
import { countUnstablePoles, describeInteraction } from '../../src/frequency/index.js';
import { biggestLogModulus } from '../../src/scoring/baselines/biggest-log-modulus.js';
import { halveGains, publishedBaselines } from '../../src/scoring/baselines/index.js';
import { offBy } from './circuit.js';
import { readDocument } from './documents.js';

/**
 * Two distillation columns: R. K. Wood, M. W. Berry, Chem. Eng. Sci. 28 (1973) 1707, and B. A. Ogunnaike,
 * J. P. Lemaire, M. Morari, W. H. Ray, AIChE J. 29 (1983) 632.
 */
const columns = [
  // W. L. Luyben, Ind. Eng. Chem. Process Des. Dev. 25 (1986) 654: settings as in the documents.
  ['Wood-Berry', 'wood-berry-blt', 3.98, 0.02],
  ['Ogunnaike-Ray', 'ogunnaike-ray-blt', 6.01, 0.06],
] as const;

describe.each(columns)('the %s column', (_, name, logModulus, tolerance) => {
  const { rules, settings } = readDocument(name);
  const all = settings.map((__, i) => i);

  it('has the published closed-loop log modulus at the published settings', () => {
    // Published in continuous time, hence the short scan.
    const { circuit } = readDocument(name, 0.002);
    const got = biggestLogModulus(circuit.loops, circuit.controllers, all);
    expect(Math.abs(got - logModulus)).toBeLessThan(0.02);
  });

  it('is given about the published settings by BLT', () => {
    // The hold adds half a scan of dead time to what was tuned in continuous time.
    const blt = publishedBaselines(rules).find((b) => b.method === 'BLT');
    settings.forEach((published, i) => {
      expect(offBy(blt?.settings?.[i]?.kc ?? null, published.kc)).toBeLessThan(tolerance);
      expect(offBy(blt?.settings?.[i]?.ti ?? null, published.ti)).toBeLessThan(tolerance);
    });
  });

  it('is given a complete set of settings by every rule', () => {
    for (const baseline of publishedBaselines(rules)) {
      expect(baseline.settings?.every((own) => own !== null && own.kc !== 0 && own.ti > 0)).toBe(
        true,
      );
      expect(baseline.reason).toBeUndefined();
    }
  });
});

describe('Wood-Berry', () => {
  it('has the published relative gain', () => {
    // Wood & Berry 1973.
    const { circuit, paths } = readDocument('wood-berry-blt');
    expect(describeInteraction(paths, circuit.network).relativeGains?.[0]?.[0]).toBeCloseTo(
      2.009,
      3,
    );
  });
});

describe('halved gains', () => {
  it('halve the gain of retuned loops alone', () => {
    const { rules, settings } = readDocument('wood-berry-blt');
    const halved = halveGains(settings, [{ retuned: true }, { retuned: false }]);
    expect(halved).toEqual([{ ...settings[0], kc: 0.1875 }, settings[1]]);
    expect(rules.loops).toHaveLength(2);
  });
});

describe('BLT', () => {
  it('leaves both columns stable', () => {
    for (const [, name] of columns) {
      const { circuit } = readDocument(name);
      expect(
        countUnstablePoles(circuit.loops, circuit.controllers, [[]])[0]?.unstable,
      ).toBeLessThan(1);
    }
  });
});
