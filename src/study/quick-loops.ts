import { everyOf, type Loop, type LoopNetwork } from '../controllers/index.js';
import { type UnitPath, unstablePoles } from '../responses/index.js';
import type { CompiledJob } from './compiled-job.js';
import { lagsOf } from './horizon.js';

/** A loop whose own response is over within this many long steps has to be simulated at its scan. */
const quickSteps = 12;

const ownPaths = (paths: readonly UnitPath[], loop: Loop, source: number): UnitPath[] =>
  paths.filter((p) => p.source === source && p.measurement === loop.measurement);

/**
 * True where a loop has to run at its own scan when the rest of the unit takes long steps: an inner
 * loop, or one whose own response is over within a few of them. A loop that scans no more often than
 * that is never one.
 */
export function isQuick(compiled: CompiledJob, index: number, longStep: number): boolean {
  const { network, paths } = compiled;
  const loop = network.loops[index] as Loop;
  if (!loop.automatic || !('source' in loop.drives)) return false;
  if (everyOf(loop) * compiled.scan >= longStep * (1 - 1e-9)) return false;
  const own = ownPaths(paths, loop, loop.drives.source);
  if (own.some((p) => unstablePoles(p.model) > 0)) return false;
  const time = own.reduce((most, p) => Math.max(most, p.model.deadTime + lagsOf(p.model)), 0);
  return (network.outerOf[index] as number) >= 0 || time < quickSteps * longStep;
}

/** True where a loop's own response can be simulated apart: real lags side by side, nothing direct. */
export function standsApart(compiled: CompiledJob, index: number): boolean {
  const loop = compiled.network.loops[index] as Loop;
  if (!('source' in loop.drives)) return false;
  return ownPaths(compiled.paths, loop, loop.drives.source).every(
    ({ model }) =>
      model.course === undefined &&
      model.factors.every((f) => f.length === 2) &&
      model.numerator.length <= model.factors.length &&
      separated(model.factors),
  );
}

/** Lags far enough apart to stand side by side, with room for what a spread does to them. */
function separated(factors: readonly Float64Array[]): boolean {
  const times = factors.map((f) => (f[1] as number) / (f[0] as number)).sort((a, b) => a - b);
  return times.every((t, i) => i === 0 || t > 1.06 * (times[i - 1] as number));
}

/** A unit's paths dealt to the two rates. */
export interface SplitPaths {
  /** Quick loops' own responses. */
  readonly own: UnitPath[];
  /** Everything else; what loops move comes earlier by up to half of what a long step adds to their hold. */
  readonly rest: UnitPath[];
}

/**
 * What a longer hold adds to each loop on average is taken off the dead times behind it, where there
 * is as much. Behind a quick inner loop that is the hold of its outer loop.
 * @param scan  s between the unit's common scans
 * @param longStep  s
 */
export function splitPaths(
  paths: readonly UnitPath[],
  { loops, outerOf }: LoopNetwork,
  quick: readonly boolean[],
  scan: number,
  longStep: number,
): SplitPaths {
  const added = new Map<number, number>();
  loops.forEach((l, i) => {
    if (!l.automatic || !('source' in l.drives)) return;
    const outer = loops[outerOf[i] as number];
    const holding = quick[i] && outer?.automatic ? outer : l;
    added.set(l.drives.source, Math.max(0, (longStep - everyOf(holding) * scan) / 2));
  });
  const isOwn = (p: UnitPath): boolean =>
    loops.some(
      (l, i) =>
        quick[i] &&
        'source' in l.drives &&
        l.drives.source === p.source &&
        l.measurement === p.measurement,
    );
  const rest = paths
    .filter((p) => !isOwn(p))
    .map((p) => {
      const deadTime = Math.max(0, p.model.deadTime - (added.get(p.source) ?? 0));
      return { ...p, model: { ...p.model, deadTime } };
    });
  return { own: paths.filter(isOwn), rest };
}
