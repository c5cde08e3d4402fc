import type { Trend } from '../contract/index.js';
import type { Trajectory } from '../simulation/index.js';
import { upsetTag } from './upsets.js';
import type { Workbench } from './workbench.js';

/** Most samples of a response in a document. */
const mostSamples = 400;
/** Significant digits of a sample: a plot needs no more, and a document with more is twice as long. */
const digits = 6;

const shorten = (value: number): number => {
  const short = Number(value.toPrecision(digits));
  return short === 0 ? 0 : short;
};

/**
 * One upset's responses in engineering units and the job's time unit, as deviations from the
 * operating point; thinned evenly, the last sample kept.
 */
export function trendOf(bench: Workbench, upset: number, trajectory: Trajectory): Trend {
  const { compiled, tuning } = bench;
  const weighted = tuning.upsets[upset] as Workbench['tuning']['upsets'][number];
  const last = (trajectory.pv[0]?.length ?? 1) - 1;
  const stride = Math.max(1, Math.ceil(last / mostSamples));
  const samples: number[] = [];
  for (let k = 0; k < last; k += stride) samples.push(k);
  samples.push(last);
  const pick = (values: Float64Array): number[] => samples.map((k) => shorten(values[k] as number));
  return {
    kind: weighted.upset.kind,
    tag: upsetTag(compiled, weighted),
    time: samples.map((k) => shorten((k * trajectory.step) / compiled.timeUnit)),
    loops: Object.fromEntries(
      compiled.job.loops.map(({ tag }, i) => [
        tag,
        {
          pv: pick(trajectory.pv[i] as Float64Array),
          sp: pick(trajectory.sp[i] as Float64Array),
          op: pick(trajectory.op[i] as Float64Array),
        },
      ]),
    ),
  };
}
