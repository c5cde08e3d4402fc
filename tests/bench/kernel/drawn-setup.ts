import { Random } from '../../../src/base/index.js';
import {
  buildNetwork,
  type DiscreteController,
  discretizeController,
  type Loop,
} from '../../../src/controllers/index.js';
import {
  firstOrder,
  sampleUnit,
  secondOrderLags,
  type UnitPath,
} from '../../../src/responses/index.js';
import { flattenUnit } from '../../../src/simulation/flat-unit.js';
import type { KernelSetup, Upset } from '../../../src/simulation/index.js';

/** A unit to run, and the same as a list of numbers for the C loop. */
export interface DrawnSetup {
  readonly setup: KernelSetup;
  readonly controllers: readonly DiscreteController[];
  readonly numbers: Float64Array;
}

const steps = 1200;

/**
 * Loops on lags with dead time, one scan a second, four upsets of 1,200 steps.
 * @param share  of the other inputs that move a measurement besides its own
 */
export function drawSetup(count: number, share: number): DrawnSetup {
  const random = new Random(count, 1000 * share);
  const paths: UnitPath[] = [];
  for (let m = 0; m < count; m += 1) {
    for (let source = 0; source < count; source += 1) {
      if (source !== m && random.uniform() >= share) continue;
      const gain = source === m ? 1 : (0.3 / count) * random.normal();
      const lag = 20 + 40 * random.uniform();
      const deadTime = 10 * random.uniform();
      const model =
        random.uniform() < 0.5
          ? firstOrder(gain, lag, deadTime)
          : secondOrderLags(gain, [lag, lag / 4], 0, deadTime);
      paths.push({ source, measurement: m, model });
    }
  }
  const loops = Array.from(
    { length: count },
    (_, i): Loop => ({
      measurement: i,
      drives: { source: i },
      automatic: true,
      outputLow: -50,
      outputHigh: 50,
      rateLimit: 5,
      setpointSource: -1,
    }),
  );
  const controllers = loops.map((_, i) =>
    discretizeController(
      { kc: 1, ti: 40, td: i % 4 === 0 ? 4 : 0, tf: i % 2 === 0 ? 2 : 0 },
      {
        setpointWeight: 1,
        derivativeSetpointWeight: 0,
        derivativeGain: 10,
        filterOrder: 1,
        scan: 1,
      },
    ),
  );
  const upsets = [0, 1, 2, 3].map((u): Upset => {
    const loop = u % count;
    return u % 2 === 0
      ? { kind: 'setpoint', loop, size: 1, opened: [] }
      : { kind: 'load', loop, source: loop, size: 2, opened: [] };
  });
  const setup: KernelSetup = {
    network: buildNetwork(loops),
    units: [sampleUnit(paths, count, count, 1)],
    upsets,
    bands: upsets.map(() => loops.map(() => 0.05)),
    stepsPerScan: 1,
    steps,
  };
  return { setup, controllers, numbers: numbersOf(setup, controllers) };
}

/** In the order in which the C loop takes them. */
function numbersOf(setup: KernelSetup, controllers: readonly DiscreteController[]): Float64Array {
  const { network, units, upsets, bands, stepsPerScan } = setup;
  const [unit] = units;
  if (unit === undefined) throw new RangeError('a setup without a unit');
  const { groups, wide, direct, lead } = flattenUnit(unit, network);
  if (wide.length + direct.length > 0) throw new RangeError('the C loop knows sections alone');
  const { loops } = network;
  return Float64Array.from([
    ...[loops.length, unit.sourceCount, unit.measurementCount, groups.source.length],
    ...[groups.decay.length, upsets.length, setup.steps, stepsPerScan, lead, unit.step],
    ...groups.source,
    ...groups.delay,
    ...groups.measurement,
    ...groups.start,
    ...groups.decay,
    ...groups.now,
    ...groups.before,
    ...network.order,
    ...loops.flatMap((loop, i) => {
      const c = controllers[i] as DiscreteController;
      const reach = loop.rateLimit * unit.step * stepsPerScan;
      return [
        ...[c.kp, c.ki, c.kd, c.derivativeDecay, c.filterDecay, c.filterOrder === 2 ? 1 : 0],
        ...[c.setpointWeight, c.derivativeSetpointWeight, loop.outputLow, loop.outputHigh, reach],
        loop.measurement,
        'source' in loop.drives ? loop.drives.source : -1,
        network.outerOf[i] as number,
        'loop' in loop.drives ? loop.drives.loop : -1,
      ];
    }),
    ...upsets.flatMap((upset, u) => [
      upset.kind === 'disturbance' ? -1 : upset.loop,
      upset.kind === 'setpoint' ? -1 : upset.source,
      upset.size,
      ...(bands[u] as readonly number[]),
    ]),
  ]);
}
