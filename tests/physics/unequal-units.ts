import type { Random } from '../../src/base/index.js';
import {
  buildNetwork,
  type ControllerSettings,
  commonPeriod,
  type DiscreteController,
  discretizeController,
  everyOf,
  type LoopNetwork,
} from '../../src/controllers/index.js';
import { frequencyGrid, LiftedLoops } from '../../src/frequency/index.js';
import { type ProcessModel, sampleUnit, type UnitPath } from '../../src/responses/index.js';
import type { LagPath } from '../published/closed-loop-matrix.js';
import { at, between, chance, pick } from './cases.js';
import { freeLoop } from './drawn-units.js';

/** Loops that scan at different intervals of a common step of one second. */
export interface UnequalUnit {
  readonly lags: readonly LagPath[];
  readonly network: LoopNetwork;
  readonly settings: readonly ControllerSettings[];
}

const modelOf = ({ pole, drive, deadTime }: LagPath): ProcessModel => ({
  numerator: Float64Array.of(drive),
  factors: [Float64Array.of(-pole, 1)],
  deadTime,
});

export const pathsOf = (unit: UnequalUnit): UnitPath[] =>
  unit.lags.map((lag) => ({
    source: lag.source,
    measurement: lag.measurement,
    model: modelOf(lag),
  }));

/** Controllers at their own scans, one gain multiplied. */
export const controllersOf = (
  { network, settings }: UnequalUnit,
  loop = 0,
  factor = 1,
): DiscreteController[] =>
  settings.map((own, i) =>
    discretizeController(
      { ...own, kc: own.kc * (i === loop ? factor : 1) },
      {
        setpointWeight: 1,
        derivativeSetpointWeight: 0,
        derivativeGain: 8,
        filterOrder: i % 2 === 0 ? 1 : 2,
        scan: everyOf(at(network.loops, i)),
      },
    ),
  );

export function liftedOf(unit: UnequalUnit, perDecade = 40, horizon = 4000): LiftedLoops {
  const { network, lags } = unit;
  const longest = Math.max(...lags.map((lag) => lag.deadTime));
  const width = network.loops.length;
  const sampled = sampleUnit(pathsOf(unit), width, width, 1);
  const period = commonPeriod(network);
  return new LiftedLoops(
    sampled,
    network,
    frequencyGrid(period, horizon, longest, perDecade),
    false,
  );
}

type Kind = 'lag' | 'integrator' | 'unstable';

function drawLag(random: Random, kind: Kind, slow: number): { pole: number; drive: number } {
  const time = between(random, 3, 20) * slow;
  const gain = between(random, 0.3, 3) * pick(random, [1, -1]);
  if (kind === 'integrator') return { pole: 0, drive: gain / time };
  return { pole: (kind === 'lag' ? -1 : 1) / time, drive: gain / time };
}

/** The same unit with nothing told from loop to loop. */
export const untold = (unit: UnequalUnit): UnequalUnit => ({
  ...unit,
  network: buildNetwork(unit.network.loops.map(({ feedforward: _, ...loop }) => loop)),
});

/** Two loops, or three, that scan every so many seconds, each pulling on the others or one in the other. */
export function drawUnequal(random: Random, scans: readonly number[], brisk = 1): UnequalUnit {
  const cascade = scans.length === 2 && chance(random, 0.35);
  const lags: LagPath[] = [];
  const settings: ControllerSettings[] = [];
  scans.forEach((scan, m) => {
    // In a cascade the slow loop, the second, drives the first.
    const kinds: Kind[] = cascade && m === 0 ? ['lag'] : ['lag', 'lag', 'integrator', 'unstable'];
    const own = drawLag(random, pick(random, kinds), scan);
    // A long dead time in many steps makes more states than eigenvalues are to be had of.
    const most = scan > 12 ? 0.5 : 3;
    const deadTime = pick(random, [0, 0, Math.min(1, most) * scan, most * scan * random.uniform()]);
    const source = cascade ? 0 : m;
    lags.push({ source, measurement: m, ...own, deadTime });
    const wait = deadTime + scan;
    const gain = cascade && m === 1 ? Math.abs(at(lags, 0).drive / at(lags, 0).pole) : 1;
    settings.push({
      kc: (between(random, 0.2, 1) * brisk * gain) / (own.drive * wait),
      ti: chance(random, 0.2) ? Number.POSITIVE_INFINITY : between(random, 3, 12) * wait,
      td: chance(random, 0.6) ? 0 : between(random, 0.1, 0.6) * wait,
      tf: chance(random, 0.5) ? 0 : between(random, 1, 3) * scan,
    });
    if (cascade) return;
    scans.forEach((other, s) => {
      if (s === m || !chance(random, 0.8)) return;
      const shared = own.pole >= 0 && chance(random, 0.4);
      const weak = shared ? own : drawLag(random, 'lag', Math.sqrt(scan * other));
      const drive = weak.drive * between(random, 0.1, 0.8);
      const late = pick(random, [0, 1, other * random.uniform()]);
      lags.push({ source: s, measurement: m, pole: weak.pole, drive, deadTime: late });
    });
  });
  // The second is told what the first does, now or some time ago; not up a cascade.
  const told =
    !cascade && chance(random, 0.3)
      ? {
          from: { loop: 0 },
          gain: between(random, 0.1, 1) * pick(random, [1, -1]),
          lead: pick(random, [0, 4]),
          lag: between(random, 2, 20),
          deadTime: pick(random, [0, 7 * random.uniform()]),
        }
      : null;
  const loops = scans.map((scan, i) => ({
    ...freeLoop(i, cascade && i === 1 ? { loop: 0 } : { source: i }),
    every: scan,
    ...(told !== null && i === 1 ? { feedforward: [told] } : {}),
  }));
  return { lags, network: buildNetwork(loops), settings };
}
