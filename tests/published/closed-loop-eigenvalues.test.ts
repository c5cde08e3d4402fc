import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Feedforward,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import { countUnstablePoles, frequencyGrid, SampledLoops } from '../../src/frequency/index.js';
import { type ProcessModel, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import { freeLoop } from './circuit.js';
import { closedLoopMatrix, eigenvalueSizes, type LagPath } from './closed-loop-matrix.js';

/** Loops around lags, integrators and unstable lags, one scan a second. */
interface DrawnUnit {
  readonly paths: readonly LagPath[];
  readonly network: LoopNetwork;
  readonly settings: readonly ControllerSettings[];
  /** True: all controllers run the same algorithm. */
  readonly alike: boolean;
}

const pick = <T>(random: Random, choices: readonly T[]): T =>
  choices[random.integer(choices.length)] as T;
const between = (random: Random, low: number, high: number): number =>
  low * (high / low) ** random.uniform();

/** Pole in 1/s and drive of a response of some gain. */
function drawLag(
  random: Random,
  kind: 'lag' | 'integrator' | 'unstable',
): { pole: number; drive: number } {
  const time = between(random, 3, 40);
  const gain = between(random, 0.2, 5) * pick(random, [1, -1]);
  if (kind === 'integrator') return { pole: 0, drive: gain / time };
  return { pole: (kind === 'lag' ? -1 : 1) / time, drive: gain / time };
}

function drawSettings(random: Random, drive: number, deadTime: number): ControllerSettings {
  const wait = deadTime + 1;
  // One in ten acts the wrong way round.
  const sign = random.uniform() < 0.1 ? -1 : 1;
  const terms = pick(random, ['P', 'PI', 'PI', 'PID', 'PID']);
  return {
    kc: (sign * between(random, 0.2, 1)) / (drive * wait),
    ti: terms === 'P' ? Number.POSITIVE_INFINITY : between(random, 2, 15) * wait,
    td: terms === 'PID' ? between(random, 0.1, 1) * wait : 0,
    tf: terms === 'PID' ? between(random, 1, 3) : pick(random, [0, 0, 2]),
  };
}

const dead = (random: Random): number => pick(random, [0, 1, 2, 3, 7 * random.uniform()]);

/** Every loop moves every measurement a little; an unstable pole belongs to its measurement. */
function drawCoupled(random: Random): DrawnUnit {
  const width = 1 + random.integer(3);
  const paths: LagPath[] = [];
  const settings: ControllerSettings[] = [];
  for (let m = 0; m < width; m += 1) {
    const own = drawLag(random, pick(random, ['lag', 'lag', 'integrator', 'unstable']));
    const deadTime = dead(random);
    for (let source = 0; source < width; source += 1) {
      if (source === m) paths.push({ source, measurement: m, ...own, deadTime });
      else if (random.uniform() < 0.7) {
        const shared = own.pole >= 0 && random.uniform() < 0.5;
        const weak = shared ? { ...own } : drawLag(random, 'lag');
        const drive = weak.drive * between(random, 0.05, 0.6);
        paths.push({ source, measurement: m, pole: weak.pole, drive, deadTime: dead(random) });
      }
    }
    settings.push(drawSettings(random, own.drive, deadTime));
  }
  const loops = settings.map((_, i) => freeLoop(i, { source: i }));
  return { paths, network: buildNetwork(loops), settings, alike: false };
}

/** An outer loop on measurement 0 drives the inner loop on measurement 1. */
function drawCascade(random: Random): DrawnUnit {
  const inner = drawLag(random, 'lag');
  const outer = drawLag(random, pick(random, ['lag', 'integrator', 'unstable']));
  const innerDead = dead(random);
  const outerDead = innerDead + dead(random);
  const paths: LagPath[] = [
    { source: 0, measurement: 0, ...outer, deadTime: outerDead },
    { source: 0, measurement: 1, ...inner, deadTime: innerDead },
  ];
  // From the inner measurement to the outer one: the inner gain is taken out of the outer drive.
  const outerDrive = outer.drive / (inner.drive / Math.abs(inner.pole));
  const settings = [
    drawSettings(random, outerDrive, outerDead + 3),
    drawSettings(random, inner.drive, innerDead),
  ];
  const loops = [freeLoop(0, { loop: 1 }), freeLoop(1, { source: 0 })];
  return { paths, network: buildNetwork(loops), settings, alike: false };
}

/** Two loops that are one and the same, so that both turn unstable at one gain and one frequency. */
function drawTwins(random: Random): DrawnUnit {
  const own = drawLag(random, pick(random, ['lag', 'integrator', 'unstable']));
  const deadTime = dead(random);
  const paths = [0, 1].map((i): LagPath => ({ source: i, measurement: i, ...own, deadTime }));
  const settings = drawSettings(random, own.drive, deadTime);
  const loops = [0, 1].map((i) => freeLoop(i, { source: i }));
  return { paths, network: buildNetwork(loops), settings: [settings, settings], alike: true };
}

/** Coupled loops that tell each other of their outputs: at once downwards, delayed upwards. */
function drawTold(random: Random): DrawnUnit {
  const unit = drawCoupled(random);
  const loops = unit.network.loops.map((loop, i) => {
    const others = unit.network.loops.flatMap((_, j) => (j === i ? [] : [j]));
    const feedforward = others.map((j): Feedforward => {
      const lag = pick(random, [0, between(random, 0.5, 20)]);
      return {
        from: { loop: j },
        gain: between(random, 0.05, 0.8) * pick(random, [1, -1]),
        lead: lag === 0 ? 0 : pick(random, [0, between(random, 0.5, 20)]),
        lag,
        deadTime: j > i ? dead(random) : 1 + dead(random),
      };
    });
    return { ...loop, feedforward };
  });
  return { ...unit, network: buildNetwork(loops) };
}

const draws = { coupled: drawCoupled, cascade: drawCascade, twins: drawTwins, told: drawTold };

/** The same response as a continuous model: drive / (s - pole). */
function modelOf({ pole, drive, deadTime }: LagPath): ProcessModel {
  if (pole === 0)
    return { numerator: Float64Array.of(drive), factors: [Float64Array.of(0, 1)], deadTime };
  const factors = [Float64Array.of(1, -1 / pole)];
  return { numerator: Float64Array.of(-drive / pole), factors, deadTime };
}

function controllersOf({ settings, alike }: DrawnUnit, factor: number): DiscreteController[] {
  return settings.map((own, i) => {
    const scaled = { ...own, kc: own.kc * factor };
    const second = !alike && i === 1;
    return discretizeController(scaled, {
      setpointWeight: second ? 0.7 : 1,
      derivativeSetpointWeight: second ? 1 : 0,
      derivativeGain: 8,
      filterOrder: second ? 2 : 1,
      scan: 1,
    });
  });
}

function sampledLoopsOf({ paths, network }: DrawnUnit): SampledLoops {
  const width = network.loops.length;
  const unitPaths = paths.map(
    (path): UnitPath => ({
      source: path.source,
      measurement: path.measurement,
      model: modelOf(path),
    }),
  );
  const unit = sampleUnit(unitPaths, width, width, 1);
  const longest = Math.max(...paths.map((path) => path.deadTime));
  return new SampledLoops(unit, network, frequencyGrid(1, 500, longest, 24));
}

/** Gain factors just below and above each change of the number of unstable poles along a scale. */
function boundariesOf(sizesAt: (factor: number) => number[]): number[] {
  const unstableAt = (factor: number): number => sizesAt(factor).filter((size) => size >= 1).length;
  const scale = [0.1, 0.3, 1, 2, 4, 10];
  const counts = scale.map(unstableAt);
  return scale.slice(1).flatMap((to, k) => {
    const wanted = counts[k] as number;
    if (counts[k + 1] === wanted) return [];
    let low = scale[k] as number;
    let high = to;
    for (let pass = 0; pass < 26; pass += 1) {
      const middle = (low + high) / 2;
      if (unstableAt(middle) === wanted) low = middle;
      else high = middle;
    }
    return [low];
  });
}

/** Eigenvalues so near the circle that their own rounding error could carry them across. */
const isClear = (sizes: readonly number[]): boolean =>
  sizes.every((size) => Math.abs(size - 1) > 2e-7);

describe('the count of unstable closed-loop poles', () => {
  // Outside check: eigenvalues by the general library ml-matrix.
  it.each(['coupled', 'cascade', 'twins', 'told'] as const)(
    'agrees with the eigenvalues of drawn loops, %s, on both sides of every boundary',
    (kind) => {
      let compared = 0;
      fc.assert(
        fc.property(fc.integer(), (seed) => {
          const unit = draws[kind](new Random(seed));
          const loops = sampledLoopsOf(unit);
          const sizesAt = (factor: number): number[] =>
            eigenvalueSizes(
              closedLoopMatrix(unit.paths, unit.network, controllersOf(unit, factor)),
            );
          const near = boundariesOf(sizesAt).flatMap((factor) => [
            factor * (1 - 1e-3),
            factor * (1 - 1e-5),
            factor * (1 + 1e-5),
            factor * (1 + 1e-3),
          ]);
          for (const factor of [0.5, 1.5, 6, ...near]) {
            const sizes = sizesAt(factor);
            if (!isClear(sizes)) continue;
            const wanted = sizes.filter((size) => size > 1).length;
            const [count] = countUnstablePoles(loops, controllersOf(unit, factor), [[]]);
            expect({
              factor,
              decided: count?.decided,
              unstable: (count?.unstable ?? -1) + 0,
            }).toEqual({
              factor,
              decided: true,
              unstable: wanted,
            });
            compared += 1;
          }
        }),
        { numRuns: 100 },
      );
      expect(compared).toBeGreaterThan(400);
    },
  );
});
