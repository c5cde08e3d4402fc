import type { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type Feedforward,
  type Loop,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import {
  firstOrder,
  integrating,
  type ProcessModel,
  rational,
  secondOrderLags,
  secondOrderPeriod,
  stepResponse,
  type UnitPath,
} from '../../src/responses/index.js';
import type { Upset } from '../../src/simulation/index.js';
import { at, between, chance, pick } from './cases.js';

/** A unit with its loops, one scan a second; every loop has the measurement of its own number. */
export interface DrawnUnit {
  readonly paths: readonly UnitPath[];
  readonly sourceCount: number;
  readonly network: LoopNetwork;
  readonly settings: readonly ControllerSettings[];
  readonly controllers: readonly DiscreteController[];
  readonly upsets: readonly Upset[];
}

export const freeLoop = (measurement: number, drives: Loop['drives']): Loop => ({
  measurement,
  drives,
  automatic: true,
  outputLow: Number.NEGATIVE_INFINITY,
  outputHigh: Number.POSITIVE_INFINITY,
  rateLimit: Number.POSITIVE_INFINITY,
  setpointSource: -1,
});

/** Everything a drawn unit may hold beyond free loops on stable responses. */
export interface Extras {
  readonly most: number;
  readonly limits: boolean;
  readonly manual: boolean;
  readonly setpointSources: boolean;
  readonly integrators: boolean;
  /** Measured step responses, alone or behind a lag. */
  readonly measured?: boolean;
  /** Terms from the disturbance and from other outputs. */
  readonly feedforward?: boolean;
  /** Dead bands and resolutions of the final elements. */
  readonly elements?: boolean;
}

function drawModel(random: Random, gain: number, extras: Extras): ProcessModel {
  const lag = between(random, 2, 40);
  const dead = chance(random, 0.3) ? 0 : pick(random, [1, 3, 6 * random.uniform()]);
  const kinds = ['lag', 'lag', 'lags', 'equal', 'swing', 'direct'];
  if (extras.integrators) kinds.push('level', 'level');
  if (extras.measured) kinds.push('measured', 'measured', 'measuredLevel');
  switch (pick(random, kinds)) {
    case 'measured':
      return stepResponse(
        pick(random, [1, 0.4, lag / 4]),
        measuredValues(random, gain),
        false,
        dead,
      );
    case 'measuredLevel':
      return stepResponse(3, [0, gain / 15, gain / 6], true, dead);
    case 'lags':
      return secondOrderLags(
        gain,
        [lag, 1 + random.uniform() * 10],
        pick(random, [0, 3, -3]),
        dead,
      );
    case 'equal':
      return secondOrderLags(gain, [lag, lag], 0, dead);
    case 'swing':
      return secondOrderPeriod(gain, 3 * lag, 0.2 + random.uniform(), 0, dead);
    case 'direct':
      return rational(Float64Array.of(gain, gain * lag * 0.2), Float64Array.of(1, lag), 1 + dead);
    case 'level':
      return integrating(gain / 20, pick(random, [0, 2]), 0, dead);
    default:
      return firstOrder(gain, lag, dead);
  }
}

/** A rise to the gain in a dozen values, with a little noise on all but the last. */
function measuredValues(random: Random, gain: number): number[] {
  const values = Array.from(
    { length: 12 },
    (_, k) => gain * (1 - Math.exp(-(k + 1) / 3) + 0.02 * random.normal()),
  );
  values[11] = gain;
  return values;
}

const drawSettings = (random: Random, gain: number): ControllerSettings => ({
  kc: (between(random, 0.1, 0.8) / gain) * (chance(random, 0.05) ? -1 : 1),
  ti: chance(random, 0.1) ? Number.POSITIVE_INFINITY : between(random, 5, 80),
  td: chance(random, 0.6) ? 0 : between(random, 0.5, 5),
  tf: chance(random, 0.5) ? 0 : between(random, 1, 4),
});

function dressLoop(random: Random, loop: Loop, extras: Extras): Loop {
  if (!extras.limits) return loop;
  return {
    ...loop,
    ...(chance(random, 0.3)
      ? { outputLow: -between(random, 0.1, 3), outputHigh: between(random, 0.1, 3) }
      : {}),
    ...(chance(random, 0.3) ? { rateLimit: between(random, 0.02, 1) } : {}),
  };
}

/** Up to two terms a loop; at once only downwards in number, as a cascade runs, so that no ring closes. */
function drawFeedforward(
  random: Random,
  loop: number,
  count: number,
  disturbance: number,
): Feedforward[] {
  return Array.from({ length: random.integer(3) }, (): Feedforward => {
    const other = random.integer(count);
    const lag = pick(random, [0, between(random, 0.5, 20)]);
    const lead = lag === 0 ? 0 : pick(random, [0, between(random, 0.5, 20)]);
    const mayBeInstant = other > loop;
    const deadTime = pick(random, [mayBeInstant ? 0 : 2, 3, 7 * random.uniform() + 0.01]);
    return {
      from: other === loop ? { source: disturbance } : { loop: other },
      gain: 0.3 * random.normal(),
      lead,
      lag,
      deadTime,
    };
  });
}

/** One to `most` loops, some in cascades, coupled through their actuators and pushed from outside. */
export function drawUnit(random: Random, extras: Extras): DrawnUnit {
  const count = 1 + random.integer(extras.most);
  const loops: Loop[] = [];
  const paths: UnitPath[] = [];
  const settings: ControllerSettings[] = [];
  let source = 0;
  for (let i = 0; i < count; i += 1) {
    const gain = between(random, 0.3, 3) * pick(random, [1, -1]);
    // A chain of up to three loops, the last of which moves an actuator.
    const inner = i > 0 ? at(loops, i - 1) : null;
    const driven = inner !== null && chance(random, 0.4);
    const base = driven ? baseOf(loops, i - 1) : source;
    if (!driven) source += 1;
    loops.push(dressLoop(random, freeLoop(i, driven ? { loop: i - 1 } : { source: base }), extras));
    paths.push({ source: base, measurement: i, model: drawModel(random, gain, extras) });
    settings.push(drawSettings(random, driven ? Math.abs(gain) : gain));
  }
  const actuators = source;
  const disturbance = source;
  source += 1;
  for (let i = 0; i < count; i += 1) {
    for (let s = 0; s < actuators; s += 1) {
      if (chance(random, 0.3))
        paths.push({
          source: s,
          measurement: i,
          model: drawModel(random, 0.2 * random.normal(), extras),
        });
    }
    if (chance(random, 0.6))
      paths.push({
        source: disturbance,
        measurement: i,
        model: drawModel(random, random.normal(), extras),
      });
  }
  if (extras.setpointSources && count > 1 && chance(random, 0.5)) {
    const from = random.integer(count);
    const to = (from + 1) % count;
    loops[from] = { ...at(loops, from), setpointSource: source };
    paths.push({ source, measurement: to, model: drawModel(random, 0.3, extras) });
    source += 1;
  }
  if (extras.feedforward) {
    loops.forEach((loop, i) => {
      loops[i] = { ...loop, feedforward: drawFeedforward(random, i, count, disturbance) };
    });
  }
  if (extras.elements) {
    loops.forEach((loop, i) => {
      if (!('source' in loop.drives)) return;
      const deadband = pick(random, [0, between(random, 0.02, 0.4)]);
      loops[i] = { ...loop, element: { deadband, resolution: pick(random, [0, 0.03, 0.1]) } };
    });
  }
  const network = buildNetwork(
    loops.map((loop, i) => ({ ...loop, automatic: !extras.manual || !standsIn(random, loops, i) })),
  );
  const open = withOutersOpen(network);
  return {
    paths,
    sourceCount: source,
    network: open,
    settings,
    controllers: settings.map((own, i) =>
      discretizeController(own, {
        setpointWeight: i % 2 === 0 ? 1 : 0.6,
        derivativeSetpointWeight: i % 3 === 0 ? 0 : 1,
        derivativeGain: 8,
        filterOrder: i % 2 === 0 ? 1 : 2,
        scan: 1,
      }),
    ),
    upsets: upsetsOf(random, open, disturbance),
  };
}

const standsIn = (random: Random, loops: readonly Loop[], i: number): boolean =>
  loops.length > 1 && i > 0 && chance(random, 0.15);

/** An outer loop of a loop in manual is in manual itself. */
function withOutersOpen(network: LoopNetwork): LoopNetwork {
  const manual = network.loops.map((loop) => !loop.automatic);
  for (let pass = 0; pass < manual.length; pass += 1) {
    network.loops.forEach((loop, i) => {
      if ('loop' in loop.drives && manual[loop.drives.loop]) manual[i] = true;
    });
  }
  return buildNetwork(network.loops.map((loop, i) => ({ ...loop, automatic: !manual[i] })));
}

function baseOf(loops: readonly Loop[], i: number): number {
  const { drives } = at(loops, i);
  return 'source' in drives ? drives.source : baseOf(loops, drives.loop);
}

/** The loops above a loop in its cascade. */
function outersOf(network: LoopNetwork, loop: number): number[] {
  const outer = at(network.outerOf, loop);
  return outer < 0 ? [] : [outer, ...outersOf(network, outer)];
}

function upsetsOf(random: Random, network: LoopNetwork, disturbance: number): Upset[] {
  const size = (): number => between(random, 0.3, 2) * pick(random, [1, -1]);
  const upsets: Upset[] = [{ kind: 'disturbance', source: disturbance, size: size(), opened: [] }];
  network.loops.forEach((loop, i) => {
    if (!loop.automatic) return;
    upsets.push({ kind: 'setpoint', loop: i, size: size(), opened: outersOf(network, i) });
    if ('source' in loop.drives)
      upsets.push({ kind: 'load', loop: i, source: loop.drives.source, size: size(), opened: [] });
  });
  return upsets;
}
