import { Random } from '../../src/base/index.js';
import type { JobInput } from '../../src/contract/index.js';
import {
  between,
  chance,
  type DrawnModel,
  drawDeadTime,
  drawIntegrating,
  drawSettling,
  drawUnstable,
  pick,
} from './drawn-models.js';
import { dial, drawController, drawSettings, drawTerms, seconds } from './drawn-settings.js';

type Loop = JobInput['loops'][number];
type Response = JobInput['unit']['responses'][number];
type Measurement = JobInput['unit']['measurements'][number];
type Actuator = JobInput['unit']['actuators'][number];

/** What is common to all loops of one drawn unit. */
interface Common {
  readonly random: Random;
  readonly unit: 's' | 'min' | 'h';
  /** In the document's time unit. */
  readonly scan: number;
  readonly scanUnit: 's' | 'min' | 'h';
  /** Outputs meet their ranges and rates. */
  readonly tight: boolean;
}

const span = ({ low, high }: { low: number; high: number }): number => high - low;

function drawOwn({ random, scan }: Common): DrawnModel {
  const gain = between(random, 0.3, 3) * pick(random, [1, -1]);
  const draw = random.uniform();
  if (draw < 0.25) return drawIntegrating(random, gain, scan);
  if (draw < 0.33) return drawUnstable(random, gain, scan);
  return drawSettling(random, gain, scan, true);
}

/** A loop on measurement `Y`, with what it drives. */
function drawLoop(
  common: Common,
  index: number,
  own: DrawnModel,
  drives: Loop['drives'],
  ranges: { readonly input: Measurement; readonly output: { low: number; high: number } },
): Loop {
  const { random, unit, scan, scanUnit } = common;
  const terms = drawTerms(random, own);
  const controller = drawController(random, terms);
  const settings = drawSettings(random, own, terms, scan);
  const action = chance(random, 0.3) ? (settings.kc < 0 ? 'direct' : 'reverse') : undefined;
  const spans = { input: span(ranges.input), output: span(ranges.output) };
  return {
    tag: `C${index}`,
    measurement: ranges.input.tag,
    drives,
    task: index > 0 && chance(random, 0.2) ? 'keep' : 'retune',
    controller: { ...controller, scan: (scan * seconds[unit]) / seconds[scanUnit], scanUnit },
    present: dial(settings, controller, spans, seconds[unit], action),
    ...(action === undefined ? {} : { action }),
    tolerance: 0.01 * spans.input * between(random, 0.3, 3),
    setpointStep: between(random, 0.5, 3) * pick(random, [1, -1]),
    ...(typeof drives === 'string'
      ? { loadStep: between(random, 0.5, 4) * pick(random, [1, -1]) }
      : {}),
  };
}

/** Wide, or so narrow that a setpoint step meets the ends. */
function drawActuator({ random, tight }: Common, index: number): Actuator {
  const reach = tight ? between(random, 1.5, 8) : 1000;
  return {
    tag: `U${index}`,
    unit: '%',
    low: -reach * between(random, 0.5, 1),
    high: reach,
    at: 0.1 * reach * random.normal() * (tight ? 0.3 : 1),
    ...(tight && chance(random, 0.6) ? { rateLimit: 0 } : {}),
  };
}

/**
 * A valid document of one to six loops, exact (`models` 1): every kind of response, cascades of two and
 * three, couplings, chains from measurement to measurement, every form and unit of settings.
 */
export function drawDocument(seed: number): JobInput {
  const random = new Random(seed);
  const unit = pick(random, ['s', 'min', 'h'] as const);
  const scanUnit = pick(random, ['s', 'min', 'h'] as const);
  const common: Common = {
    random,
    unit,
    scanUnit,
    scan: between(random, 0.05, 5),
    tight: chance(random, 0.25),
  };
  const { scan } = common;
  const count = 1 + random.integer(6);
  const measurements: Measurement[] = [];
  const actuators: Actuator[] = [];
  const responses: Response[] = [];
  const loops: Loop[] = [];
  const owns: DrawnModel[] = [];
  const depths: number[] = [];
  for (let i = 0; i < count; i += 1) {
    const low = between(random, 10, 500) * pick(random, [1, -1]);
    const input = {
      tag: `Y${i}`,
      unit: '',
      low,
      high: low + between(random, 100, 1000),
      noise: between(random, 0.01, 0.1),
    };
    const inner = owns[i - 1];
    const depth = depths[i - 1] ?? 0;
    const cascades =
      inner?.kind === 'settles' &&
      inner.model.kind !== 'step-response' &&
      depth < 2 &&
      chance(random, 0.35);
    measurements.push(input);
    if (cascades) {
      const outer = slower(drawSettlingOuter(common), inner);
      owns.push(outer);
      depths.push(depth + 1);
      responses.push({ from: `Y${i - 1}`, to: `Y${i}`, model: outer.model });
      const range = measurements[i - 1] as Measurement;
      hear(loops[i - 1] as Loop);
      loops.push(drawLoop(common, i, outer, { loop: `C${i - 1}` }, { input, output: range }));
    } else {
      const actuator = drawActuator(common, i);
      const own = drawOwn(common);
      if (actuator.rateLimit === 0) actuator.rateLimit = between(random, 0.05, 1) / scan;
      owns.push(own);
      depths.push(0);
      actuators.push(actuator);
      responses.push({ from: actuator.tag, to: input.tag, model: own.model });
      loops.push(drawLoop(common, i, own, actuator.tag, { input, output: actuator }));
    }
  }
  couple(common, owns, actuators, responses);
  const disturbances = [{ tag: 'D', unit: '', step: between(random, 0.5, 3) }];
  const longest = Math.max(
    ...owns.map((o) => (o.lag === Number.POSITIVE_INFINITY ? 0 : o.lag) + o.delay),
  );
  return {
    format: 'heddle-job/1',
    unit: {
      name: `drawn ${seed}`,
      timeUnit: unit,
      measurements,
      actuators,
      disturbances,
      responses,
      horizon: Math.max(250 * scan, 8 * longest),
    },
    loops,
    search: { models: 1, seed },
  };
}

const drawSettlingOuter = ({ random, scan }: Common): DrawnModel =>
  drawSettling(random, between(random, 0.3, 3) * pick(random, [1, -1]), scan);

/** A loop whose setpoint is driven answers it. */
function hear({ controller }: Loop): void {
  const { terms, setpointWeight } = controller;
  if (!terms.includes('I') && setpointWeight === 0) controller.setpointWeight = 0.6;
}

/** The outer loop waits for the inner one. */
const slower = (outer: DrawnModel, inner: DrawnModel): DrawnModel => ({
  ...outer,
  delay: outer.delay + 3 * inner.delay + inner.lag / 3,
});

/** Every input moves other measurements a little; what integrates or runs away is shared here and there. */
function couple(
  { random, scan }: Common,
  owns: readonly DrawnModel[],
  actuators: readonly Actuator[],
  responses: Response[],
): void {
  const chained = new Set(responses.map((r) => r.from));
  owns.forEach((own, i) => {
    const to = `Y${i}`;
    const given = responses.find((r) => r.to === to)?.from;
    const inputs = [...actuators.map((a) => a.tag), 'D'];
    for (const from of inputs) {
      if (from === given || !chance(random, from === 'D' ? 0.7 : 0.35)) continue;
      const size = between(random, 0.05, 0.4) * pick(random, [1, -1]);
      const model = coupling(random, own, size, scan, chained.has(to));
      responses.push({ from, to, model });
    }
  });
}

function coupling(
  random: Random,
  own: DrawnModel,
  share: number,
  scan: number,
  isChained: boolean,
): Response['model'] {
  const deadTime = drawDeadTime(random, scan);
  if (own.kind === 'integrates' && chance(random, 0.5)) {
    return { kind: 'integrating', rate: share * own.gain, deadTime };
  }
  if (own.kind === 'unstable' && !isChained && chance(random, 0.5)) {
    const denominator = [own.lag, -1];
    return { kind: 'transfer-function', numerator: [share * own.gain], denominator, deadTime };
  }
  const gain = own.kind === 'integrates' ? share * own.gain * 20 * scan : share * own.gain;
  return drawSettling(random, gain, scan, !isChained).model;
}
