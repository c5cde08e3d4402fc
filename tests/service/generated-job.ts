import fc from 'fast-check';
import type { JobInput } from '../../src/contract/index.js';

type Response = JobInput['unit']['responses'][number];
type Loop = JobInput['loops'][number];

const number = (low: number, high: number) =>
  fc.double({ min: low, max: high, noNaN: true, noDefaultInfinity: true });
const size = number(0.1, 5);
const gain = fc.tuple(size, fc.boolean()).map(([value, up]) => (up ? value : -value));
const optional = { requiredKeys: [] as [] };

const settled: fc.Arbitrary<Response['model']> = fc.oneof(
  fc.record({
    kind: fc.constant('first-order' as const),
    gain,
    timeConstant: size,
    deadTime: number(0, 3),
  }),
  fc.record({
    kind: fc.constant('second-order' as const),
    gain,
    timeConstants: fc.tuple(size, size),
    lead: number(-2, 2),
    deadTime: number(0, 3),
  }),
  fc.record({ kind: fc.constant('second-order' as const), gain, period: size, damping: size }),
  fc.record({
    kind: fc.constant('transfer-function' as const),
    numerator: fc.tuple(gain).map((list) => [...list]),
    denominator: fc.tuple(size, size, size).map((list) => [...list]),
  }),
);

const drifting: fc.Arbitrary<Response['model']> = fc.record({
  kind: fc.constant('integrating' as const),
  rate: gain,
  timeConstant: size,
  deadTime: number(0, 1),
});

const spread = fc.record(
  { gain: number(0, 0.9), timeConstant: number(0, 0.9), deadTime: number(0, 0.9) },
  optional,
);

const terms = fc.constantFrom('P' as const, 'PI' as const, 'PID' as const);
const limits = fc.record(
  {
    overshoot: number(0, 40),
    peakSensitivity: fc.oneof(
      number(1.2, 3),
      fc.record({ max: number(1.2, 3), nominal: fc.boolean() }),
    ),
    phaseMargin: fc.record({ min: number(20, 70) }),
    outputRate: size,
  },
  optional,
);

const taskOf = (index: number, kept: boolean) => (kept && index > 0 ? 'keep' : 'retune');

/** One loop on its own measurement and actuator; the number makes their tags. */
const loopOf = (index: number, averaging: boolean): fc.Arbitrary<Loop> =>
  fc
    .record({
      terms,
      gain,
      integral: size,
      derivative: size,
      filter: size,
      limits,
      kept: fc.boolean(),
      bound: fc.boolean(),
      dialled: fc.boolean(),
    })
    .map(({ terms: own, gain: kc, integral, derivative, filter, limits: held, ...drawn }) => ({
      tag: `C${index}`,
      measurement: `Y${index}`,
      drives: `U${index}`,
      task: taskOf(index, drawn.kept),
      goal: averaging ? 'averaging' : 'tight',
      controller: { terms: own, scan: 0.5, gainIn: 'engineering', filterOrder: 2 },
      ...(taskOf(index, drawn.kept) === 'retune' && !drawn.dialled
        ? {}
        : {
            present: {
              gain: kc,
              filter,
              ...(own === 'P' ? {} : { integral }),
              ...(own === 'PID' ? { derivative } : {}),
            },
          }),
      ...(drawn.bound ? { bounds: { gain: [Math.abs(kc) / 8, Math.abs(kc) / 3] } } : {}),
      limits: { ...held, ...(averaging ? { levelBand: 3 } : {}) },
    }));

function responsesOf(levels: readonly boolean[]): fc.Arbitrary<Response[]> {
  const pairs = levels.flatMap((level, to) =>
    [...levels.keys()].map((from) => ({ from: `U${from}`, to: `Y${to}`, own: from === to, level })),
  );
  const chosen = pairs.map(({ from, to, own, level }) =>
    fc
      .record({ model: own && level ? drifting : settled, spread, present: fc.boolean() })
      .map((drawn) =>
        own || drawn.present ? [{ from, to, model: drawn.model, spread: drawn.spread }] : [],
      ),
  );
  return fc.tuple(...chosen).map((lists) => lists.flat());
}

/** Valid jobs of one to four loops: lags, swings, rational responses and levels, coupled at random. */
export const generatedJob: fc.Arbitrary<JobInput> = fc
  .array(fc.boolean(), { minLength: 1, maxLength: 4 })
  .chain((levels) =>
    fc
      .record({
        responses: responsesOf(levels),
        loops: fc.tuple(...levels.map((level, index) => loopOf(index, level))),
        disturbance: settled,
        seed: fc.maxSafeNat(),
      })
      .map(({ responses, loops, disturbance, seed }) => ({
        format: 'heddle-job/1' as const,
        unit: {
          name: 'generated',
          timeUnit: 'min' as const,
          measurements: levels.map((_, index) => ({
            tag: `Y${index}`,
            unit: '%',
            low: 0,
            high: 100,
          })),
          actuators: levels.map((_, index) => ({
            tag: `U${index}`,
            unit: '%',
            low: 0,
            high: 100,
            at: 50,
          })),
          disturbances: [{ tag: 'D', unit: 't/h', step: 1 }],
          responses: [...responses, { from: 'D', to: 'Y0', model: disturbance }],
          horizon: 100,
        },
        loops,
        search: { seed },
      })),
  );
