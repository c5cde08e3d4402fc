import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerAlgorithm,
  type ControllerResponse,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  discretizeForLongStep,
  type OwnSettings,
  respondController,
  type SettingsForm,
  toInternal,
  toOwn,
} from '../../src/controllers/index.js';
import { rational, sampleUnit } from '../../src/responses/index.js';
import { simulatePlainly, type Upset } from '../../src/simulation/index.js';
import { at, between, chance, pick } from './cases.js';

const sizes = (low: number, high: number): fc.Arbitrary<number> =>
  fc.double({ min: Math.log(low), max: Math.log(high), noNaN: true }).map(Math.exp);

const forms: fc.Arbitrary<SettingsForm> = fc
  .record({
    form: fc.constantFrom('ideal', 'series', 'parallel'),
    gainIn: fc.constantFrom('percent', 'engineering', 'proportional-band'),
    integralIn: fc.constantFrom('time', 'repeats', 'gain'),
    derivativeIn: fc.constantFrom('time', 'gain'),
    timeUnit: fc.constantFrom(1, 60, 3600),
    hasIntegral: fc.boolean(),
    hasDerivative: fc.boolean(),
    inputSpan: sizes(1e-3, 1e6),
    outputSpan: sizes(1e-3, 1e6),
    action: fc.constantFrom('direct', 'reverse', undefined),
  } as const)
  .map(({ action, ...form }) => (action === undefined ? form : { ...form, action }));

const signOf = (form: SettingsForm): number => (form.action === 'direct' ? -1 : 1);

/** Relative error, equal infinities and zeros counting as none. */
const off = (a: number | undefined, b: number | undefined): number =>
  a === b ? 0 : Math.abs((a ?? Number.NaN) / (b ?? Number.NaN) - 1);

describe('the form of a controller', () => {
  it('gives back internal settings that were dialled in it, in every combination of terms and units', () => {
    fc.assert(
      fc.property(
        forms,
        sizes(1e-4, 1e4),
        fc.boolean(),
        sizes(0.1, 1e5),
        // Share of the integral time, up to where the series form ends.
        fc.double({ min: 0.001, max: 0.24, noNaN: true }),
        sizes(0.01, 100),
        (form, size, minus, ti, share, tf) => {
          const sign = form.action === undefined ? (minus ? -1 : 1) : signOf(form);
          const settings: ControllerSettings = {
            kc: sign * size,
            ti: form.hasIntegral ? ti : Number.POSITIVE_INFINITY,
            td: form.hasDerivative ? share * ti : 0,
            tf,
          };
          const own = toOwn(settings, form);
          expect(own.integral !== undefined).toBe(form.hasIntegral);
          const back = toInternal(own, form);
          for (const key of ['kc', 'ti', 'td', 'tf'] as const) {
            expect(off(back[key], settings[key])).toBeLessThan(1e-12);
          }
        },
      ),
    );
  });

  it('gives back the numbers that were dialled', () => {
    fc.assert(
      fc.property(
        forms,
        sizes(1e-3, 1e3),
        fc.boolean(),
        sizes(0.01, 1e3),
        fc.double({ min: 0.001, max: 0.9, noNaN: true }),
        sizes(0.01, 100),
        (form, size, minus, time, share, filter) => {
          const gain = form.action === undefined && minus ? -size : size;
          const percent = form.gainIn === 'proportional-band' ? 100 / size : size;
          // The derivative time is kept under the integral time, where a series form is unique.
          const own: OwnSettings = {
            gain,
            filter,
            ...(form.hasIntegral ? { integral: dialled(form, 'integral', time, percent) } : {}),
            ...(form.hasDerivative
              ? { derivative: dialled(form, 'derivative', share * time, percent) }
              : {}),
          };
          const back = toOwn(toInternal(own, form), form);
          for (const key of ['gain', 'integral', 'derivative', 'filter'] as const) {
            if (key === 'derivative' && !form.hasDerivative) continue;
            expect(off(back[key], own[key])).toBeLessThan(1e-11);
          }
        },
      ),
    );
  });

  it('gives back a series controller whose integral and derivative times are equal', () => {
    const refused: number[] = [];
    for (let i = 1; i <= 500; i += 1) {
      const own = { gain: 2, integral: i / 7, derivative: i / 7, filter: 0 };
      try {
        const back = toOwn(toInternal(own, seriesForm), seriesForm);
        // A double root of the conversion: half of the digits are all there is.
        expect(off(back.integral, own.integral)).toBeLessThan(1e-7);
      } catch (error) {
        if ((error as { code?: string }).code !== 'SETTINGS_NOT_CONVERTIBLE') throw error;
        refused.push(own.integral);
      }
    }
    expect(refused).toEqual([]);
  });

  it('takes a series controller with more derivative than integral time for its twin', () => {
    fc.assert(
      fc.property(sizes(1, 100), sizes(1.1, 10), (integral, ratio) => {
        const own = { gain: 1.5, integral, derivative: integral * ratio, filter: 0 };
        const internal = toInternal(own, seriesForm);
        const twin = toOwn(internal, seriesForm);
        expect(off(twin.integral, own.derivative)).toBeLessThan(1e-10);
        expect(off(twin.derivative, own.integral)).toBeLessThan(1e-10);
        expect(off(toInternal(twin, seriesForm).kc, internal.kc)).toBeLessThan(1e-10);
      }),
    );
  });

  it('refuses an ideal controller that has no series form, and a gain against its action', () => {
    fc.assert(
      fc.property(forms, sizes(0.1, 1e4), sizes(0.251, 10), (form, ti, share) => {
        const pid = { ...form, form: 'series', hasIntegral: true, hasDerivative: true } as const;
        const right = { kc: signOf(form), ti, td: share * ti, tf: 0 };
        const refusal = expect.objectContaining({ code: 'SETTINGS_NOT_CONVERTIBLE' });
        expect(() => toOwn(right, pid)).toThrow(refusal);
        // Without integral action every series form exists.
        const open = { ...right, ti: Number.POSITIVE_INFINITY };
        expect(toOwn(open, { ...pid, hasIntegral: false }).gain).toBeGreaterThan(0);
        const named = { ...pid, form: 'ideal', action: 'reverse' } as const;
        expect(() => toOwn({ ...right, kc: -1 }, named)).toThrow(refusal);
        expect(() => toOwn({ ...right, kc: 1 }, { ...named, action: 'direct' })).toThrow(refusal);
      }),
    );
  });

  it('needs twice the percent gain, or half the proportional band, on twice the PV span', () => {
    fc.assert(
      fc.property(forms, sizes(1e-3, 1e3), sizes(1, 1e3), (form, size, ti) => {
        const settings = { kc: signOf(form) * size, ti, td: ti / 8, tf: 1 };
        const narrow = toOwn(settings, form);
        const wide = toOwn(settings, { ...form, inputSpan: 2 * form.inputSpan });
        const factor = { percent: 2, engineering: 1, 'proportional-band': 0.5 }[form.gainIn];
        expect(off(wide.gain, factor * narrow.gain)).toBeLessThan(1e-13);
      }),
    );
  });

  it('means the same as the textbook says', () => {
    const base = { ...seriesForm, timeUnit: 60, inputSpan: 50, outputSpan: 100 };
    // Independent gains in percent: 2 + 0.5 per minute + 3 minutes.
    const parallel = {
      ...base,
      form: 'parallel',
      integralIn: 'gain',
      derivativeIn: 'gain',
    } as const;
    expect(toInternal({ gain: 2, integral: 0.5, derivative: 3 }, parallel)).toEqual({
      kc: 4,
      ti: 240,
      td: 90,
      tf: 0,
    });
    // A proportional band of 50 % is a gain of 2; 0.25 repeats per minute are 4 minutes.
    const band = {
      ...base,
      form: 'ideal',
      gainIn: 'proportional-band',
      integralIn: 'repeats',
    } as const;
    expect(toInternal({ gain: 50, integral: 0.25, derivative: 1, filter: 0.1 }, band)).toEqual({
      kc: 4,
      ti: 240,
      td: 60,
      tf: 6,
    });
    // Interacting 2, 3 min, 1 min: gain 2 (1 + 1/3), times 4 min and 45 s.
    const series = toInternal({ gain: 2, integral: 3, derivative: 1 }, base);
    expect(series.kc).toBeCloseTo(4 * (4 / 3), 12);
    expect(series.ti).toBeCloseTo(240, 12);
    expect(series.td).toBeCloseTo(45, 12);
  });
});

const seriesForm: SettingsForm = {
  form: 'series',
  gainIn: 'percent',
  integralIn: 'time',
  derivativeIn: 'time',
  timeUnit: 1,
  hasIntegral: true,
  hasDerivative: true,
  inputSpan: 1,
  outputSpan: 1,
};

/** A number to dial for a time of an ideal or series controller of some gain; parallel ones alike. */
function dialled(
  form: SettingsForm,
  term: 'integral' | 'derivative',
  time: number,
  gain: number,
): number {
  if (term === 'integral') {
    if (form.form === 'parallel') return form.integralIn === 'time' ? time / gain : gain / time;
    return { time, repeats: 1 / time, gain: gain / time }[form.integralIn];
  }
  return form.form === 'parallel' || form.derivativeIn === 'gain' ? time * gain : time;
}

function drawAlgorithm(random: Random): ControllerAlgorithm {
  return {
    setpointWeight: pick(random, [0, 0.5, 1]),
    derivativeSetpointWeight: pick(random, [0, 1]),
    derivativeGain: between(random, 2, 20),
    filterOrder: pick(random, [1, 2]),
    scan: between(random, 0.1, 10),
  };
}

function drawSettings(random: Random, scan: number): ControllerSettings {
  return {
    kc: random.normal(),
    ti: chance(random, 0.2) ? Number.POSITIVE_INFINITY : scan * between(random, 1, 100),
    td: chance(random, 0.4) ? 0 : scan * between(random, 0.5, 20),
    tf: chance(random, 0.3) ? 0 : scan * between(random, 0.5, 10),
  };
}

/** What a controller alone answers to a step of its PV or setpoint, read from a simulated run. */
function stepAnswer(
  controller: DiscreteController,
  input: 'pv' | 'setpoint',
  steps: number,
): Float64Array {
  // A disturbance that is the PV one scan later; the output moves nothing.
  const through = rational(Float64Array.of(1), Float64Array.of(1), 1);
  const unit = sampleUnit([{ source: 1, measurement: 0, model: through }], 2, 1, 1);
  const upset: Upset =
    input === 'pv'
      ? { kind: 'disturbance', source: 1, size: 1, opened: [] }
      : { kind: 'setpoint', loop: 0, size: 1, opened: [] };
  const network = buildNetwork([
    {
      measurement: 0,
      drives: { source: 0 },
      automatic: true,
      outputLow: Number.NEGATIVE_INFINITY,
      outputHigh: Number.POSITIVE_INFINITY,
      rateLimit: Number.POSITIVE_INFINITY,
      setpointSource: -1,
    },
  ]);
  const run = simulatePlainly({
    unit,
    network,
    controllers: [controller],
    stepsPerScan: 1,
    upset,
    steps,
  });
  const output = at(run.op, 0);
  return input === 'pv' ? output.slice(1) : output;
}

/** (1 - 1/z) times the response whose step answer is given, z = exp(i angle): from second differences. */
function differencedResponse(answer: Float64Array, angle: number): { re: number; im: number } {
  let re = 0;
  let im = 0;
  answer.forEach((v, k) => {
    const second = v - 2 * (answer[k - 1] ?? 0) + (answer[k - 2] ?? 0);
    re += second * Math.cos(k * angle);
    im -= second * Math.sin(k * angle);
  });
  return { re, im };
}

const blank = (): ControllerResponse => ({
  measurementRe: 0,
  measurementIm: 0,
  setpointRe: 0,
  setpointIm: 0,
});

describe('the frequency response of a controller', () => {
  it('is the transform of what the simulated controller does, from PV and from setpoint', () => {
    fc.assert(
      fc.property(
        fc.integer(),
        fc.double({ min: 0.001, max: Math.PI, noNaN: true }),
        (seed, angle) => {
          const random = new Random(seed);
          const algorithm = { ...drawAlgorithm(random), scan: 1 };
          const controller = discretizeController(drawSettings(random, 1), algorithm);
          const out = blank();
          respondController(controller, angle, out);
          const [er, ei] = [1 - Math.cos(angle), Math.sin(angle)];
          const check = (input: 'pv' | 'setpoint', re: number, im: number): void => {
            const found = differencedResponse(stepAnswer(controller, input, 600), angle);
            const sign = input === 'pv' ? -1 : 1;
            const scale = 1e-9 * (1 + Math.hypot(re, im));
            expect(Math.abs(sign * found.re - (re * er - im * ei))).toBeLessThan(scale);
            expect(Math.abs(sign * found.im - (re * ei + im * er))).toBeLessThan(scale);
          };
          check('pv', out.measurementRe, out.measurementIm);
          check('setpoint', out.setpointRe, out.setpointIm);
        },
      ),
    );
  });
});

const meanDelay = (decay: number, step: number): number => (step * decay) / (1 - decay);

describe('a controller for a long step', () => {
  it("of one scan is the scan's own controller", () => {
    fc.assert(
      fc.property(fc.integer(), (seed) => {
        const random = new Random(seed);
        const algorithm = drawAlgorithm(random);
        const settings = drawSettings(random, algorithm.scan);
        const own = discretizeController(settings, algorithm);
        expect(discretizeForLongStep(settings, algorithm, algorithm.scan)).toEqual(own);
      }),
    );
  });

  it('keeps the mean delay of its lags, and what all terms come to in the long run', () => {
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 2, max: 12 }), (seed, stride) => {
        const random = new Random(seed);
        const algorithm = drawAlgorithm(random);
        const { scan } = algorithm;
        const settings = drawSettings(random, scan);
        const own = discretizeController(settings, algorithm);
        const long = discretizeForLongStep(settings, algorithm, stride * scan);
        expect(
          Math.abs(meanDelay(long.filterDecay, stride * scan) - meanDelay(own.filterDecay, scan)),
        ).toBeLessThan(1e-10 * scan);
        expect(off(long.ki / stride, own.ki)).toBeLessThan(1e-12);
        // The gain of the derivative's ramp answer: step x kd / (1 - decay) = kc td.
        const ramp = (c: DiscreteController, step: number): number =>
          (step * c.kd) / (1 - c.derivativeDecay);
        expect(off(ramp(long, stride * scan), ramp(own, scan))).toBeLessThan(1e-10);
      }),
    );
  });

  it('differs from the controller at its scan by a share that falls with the square of frequency', () => {
    let compared = 0;
    fc.assert(
      fc.property(fc.integer(), fc.integer({ min: 2, max: 6 }), (seed, stride) => {
        const random = new Random(seed);
        const algorithm = { ...drawAlgorithm(random), scan: 1 };
        const settings = {
          kc: 1,
          ti: stride * between(random, 2, 50),
          td: chance(random, 0.5) ? 0 : 10 * stride * between(random, 1, 4),
          tf: chance(random, 0.3) ? 0 : between(random, 0.5, 10),
        };
        // Only where the derivative's own lag leaves room for the longer difference.
        fc.pre(settings.td === 0 || settings.td / algorithm.derivativeGain > stride);
        const own = discretizeController(settings, algorithm);
        const long = discretizeForLongStep(settings, algorithm, stride);
        const error = (frequency: number): number => {
          const [a, b] = [blank(), blank()];
          respondController(own, frequency, a);
          respondController(long, frequency * stride, b);
          return (
            Math.hypot(a.measurementRe - b.measurementRe, a.measurementIm - b.measurementIm) /
              Math.hypot(a.measurementRe, a.measurementIm) +
            Math.hypot(a.setpointRe - b.setpointRe, a.setpointIm - b.setpointIm) /
              Math.hypot(a.setpointRe, a.setpointIm)
          );
        };
        const base = 0.01 / (stride + settings.ti + settings.td + settings.tf);
        expect(error(base / 2)).toBeLessThan(error(base) / 3.5 + 1e-9);
        compared += 1;
      }),
    );
    expect(compared).toBeGreaterThan(100);
  });
});
