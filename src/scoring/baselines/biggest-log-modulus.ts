import {
  type ControllerSettings,
  type DiscreteController,
  discretizeController,
  type LoopNetwork,
} from '../../controllers/index.js';
import { countUnstablePoles, frequencyGrid, SampledLoops } from '../../frequency/index.js';
import { ComplexMatrix } from '../../numerics/index.js';
import { sampleUnit, type UnitPath } from '../../responses/index.js';
import type { RuleContext, RuleLoop } from './context.js';
import { filterTime, type OwnLoop } from './rule-terms.js';
import { slownessOf, ultimatePoint } from './ultimate-point.js';

export const bltSource =
  'W. L. Luyben, Simple method for tuning SISO controllers in multivariable systems, ' +
  'Ind. Eng. Chem. Process Des. Dev. 25 (1986) 654; on the sampled loops';

/** What detuning came to: the factor and all settings, or why there is none. */
export type Detuning =
  | { readonly factor: number; readonly settings: readonly (ControllerSettings | null)[] }
  | { readonly reason: string };

/**
 * The biggest log modulus, dB: the peak over frequency of 20 log10 |W / (1 + W)|, 1 + W = det(I + G C)
 * of some loops with all others closed as they are.
 * @param controllers  by loop
 * @param detuned  loop numbers
 */
export function biggestLogModulus(
  loops: SampledLoops,
  controllers: readonly DiscreteController[],
  detuned: readonly number[],
): number {
  const { matrix, loops: rows } = loops.equations;
  const n = matrix.order;
  const picked = detuned.map((loop) => rows.indexOf(loop));
  const minor = new ComplexMatrix(picked.length);
  let largest = 0;
  for (let k = 0; k < loops.angles.length; k += 1) {
    loops.solveAt(controllers, k);
    // det of the inverse on these rows is det(without them) / det(with them) = 1 / (1 + W)
    picked.forEach((row, a) => {
      picked.forEach((column, b) => {
        minor.re[a * picked.length + b] = matrix.re[row * n + column] as number;
        minor.im[a * picked.length + b] = matrix.im[row * n + column] as number;
      });
    });
    minor.invert();
    const size = Math.exp(minor.determinantLog);
    const re = size * Math.cos(minor.determinantAngle);
    const im = size * Math.sin(minor.determinantAngle);
    largest = Math.max(largest, Math.hypot(1 - re, im));
  }
  return 20 * Math.log10(largest);
}

/**
 * BLT: Ziegler-Nichols PI settings of each loop alone, all detuned by one factor F (Kc / F, Ti F) until
 * the biggest log modulus is 2 dB a loop. All other loops stay as they are.
 *
 * F is the smallest from 1 up that keeps the unit stable and meets the modulus.
 * @param settings  of all loops; those of the detuned ones are replaced
 * @param detuned  loop numbers
 * @param owns  by detuned loop
 * @source W. L. Luyben, Ind. Eng. Chem. Process Des. Dev. 25 (1986) 654
 */
export function detune(
  context: RuleContext,
  settings: readonly (ControllerSettings | null)[],
  detuned: readonly number[],
  owns: readonly OwnLoop[],
): Detuning {
  const tight = new Map<number, ControllerSettings>();
  for (const [at, index] of detuned.entries()) {
    const { loop, model } = owns[at] as OwnLoop;
    const filter = filterTime(loop, false);
    const point = model && ultimatePoint(model, loop, filter);
    if (point === null) return { reason: `${loop.tag} has no ultimate gain by itself` };
    tight.set(index, { kc: point.gain / 2.2, ti: point.period / 1.2, td: 0, tf: filter });
  }
  const loops = sampleContext(context);
  const at = (factor: number): (ControllerSettings | null)[] =>
    settings.map((own, i) => {
      const zn = tight.get(i);
      if (zn === undefined) return own;
      const hasIntegral = (context.loops[i] as RuleLoop).terms.includes('I');
      return { ...zn, kc: zn.kc / factor, ti: hasIntegral ? zn.ti * factor : Infinity };
    });
  const isMet = (factor: number): boolean => {
    const controllers = controllersOf(context, at(factor));
    if ((countUnstablePoles(loops, controllers, [[]])[0]?.unstable ?? 1) > 0) return false;
    return biggestLogModulus(loops, controllers, detuned) <= 2 * detuned.length;
  };
  const factor = smallestFactor(isMet);
  if (factor === null) return { reason: 'no detuning factor up to 100 meets the log modulus' };
  return { factor, settings: at(factor) };
}

function smallestFactor(isMet: (factor: number) => boolean): number | null {
  if (isMet(1)) return 1;
  let low = 1;
  let high = 1.15;
  while (!isMet(high)) {
    if (high > 100) return null;
    low = high;
    high *= 1.15;
  }
  for (let pass = 0; pass < 20; pass += 1) {
    const middle = (low + high) / 2;
    if (isMet(middle)) high = middle;
    else low = middle;
  }
  return high;
}

/** Controllers at the unit's step; a loop in manual has one that is never looked at. */
function controllersOf(
  context: RuleContext,
  settings: readonly (ControllerSettings | null)[],
): DiscreteController[] {
  const scan = stepOf(context);
  const idle: ControllerSettings = { kc: 0, ti: Infinity, td: 0, tf: 0 };
  return context.loops.map(({ algorithm }, i) =>
    discretizeController(settings[i] ?? idle, { ...algorithm, scan }),
  );
}

/** The shortest scan of the automatic loops. */
const stepOf = ({ loops, network }: RuleContext): number =>
  loops.reduce(
    (least, loop, i) =>
      network.loops[i]?.automatic ? Math.min(least, loop.algorithm.scan) : least,
    Number.POSITIVE_INFINITY,
  );

/** The whole unit at one step; what a slower loop holds longer stands as dead time behind its output. */
function sampleContext(context: RuleContext): SampledLoops {
  const { network } = context;
  const step = stepOf(context);
  const late = extraHold(context, step);
  const paths = context.paths.map((path): UnitPath => {
    const extra = late.get(path.source) ?? 0;
    return { ...path, model: { ...path.model, deadTime: path.model.deadTime + extra } };
  });
  const sources =
    Math.max(0, ...paths.map((p) => p.source), ...network.loops.map(highestSource)) + 1;
  const measurements =
    Math.max(0, ...paths.map((p) => p.measurement), ...network.loops.map((l) => l.measurement)) + 1;
  const slowest = Math.max(...paths.map((p) => slownessOf(p.model, step)));
  const longest = Math.max(...paths.map((p) => p.model.deadTime));
  const unit = sampleUnit(paths, sources, measurements, step);
  return new SampledLoops(unit, network, frequencyGrid(step, 20 * slowest, longest, 60));
}

const highestSource = ({ drives, setpointSource }: LoopNetwork['loops'][number]): number =>
  Math.max(setpointSource, 'source' in drives ? drives.source : -1);

function extraHold({ network, loops }: RuleContext, step: number): Map<number, number> {
  const late = new Map<number, number>();
  network.loops.forEach(({ drives }, i) => {
    const scan = (loops[i] as RuleLoop).algorithm.scan;
    if ('source' in drives) late.set(drives.source, (scan - step) / 2);
  });
  return late;
}
