import type { ProcessModel } from './model.js';
import type { StepCourse } from './step-course.js';

/** Share of a step response's range by which a thinned one may differ from it. */
const allowedShare = 2e-3;

/**
 * The same response with no more corners than it takes to stay within two thousandths of its range; its
 * gain, or final slope, is kept. A search of many steps may use it where it has shown the error of
 * its figures to be small.
 */
export function thinModel(model: ProcessModel): ProcessModel {
  const { course } = model;
  return course === undefined || course.power !== 1 ? model : { ...model, course: thin(course) };
}

function thin(course: StepCourse): StepCourse {
  const { times, weights } = course;
  const last = times.length - 1;
  const values = new Float64Array(last + 1);
  let slope = 0;
  let [lowest, highest] = [0, 0];
  for (let i = 0; i <= last; i += 1) {
    if (i > 0) {
      const lapse = (times[i] as number) - (times[i - 1] as number);
      values[i] = (values[i - 1] as number) + slope * lapse;
    }
    slope += weights[i] as number;
    lowest = Math.min(lowest, values[i] as number);
    highest = Math.max(highest, values[i] as number);
  }
  const final = course.integrators > 0 ? slope : 0;
  const kept = [0];
  keepCorners(times, values, 0, last, allowedShare * (highest - lowest), kept);
  const changes = new Float64Array(kept.length);
  let before = 0;
  kept.forEach((corner, i) => {
    const next = kept[i + 1];
    const after =
      next === undefined
        ? final
        : ((values[next] as number) - (values[corner] as number)) /
          ((times[next] as number) - (times[corner] as number));
    changes[i] = after - before;
    before = after;
  });
  return { ...course, times: Float64Array.from(kept, (i) => times[i] as number), weights: changes };
}

/**
 * The corners between two that a line along the kept ones needs to stay within a distance of all.
 * @source D. H. Douglas, T. K. Peucker, Algorithms for the reduction of the number of points required
 *   to represent a digitized line, Cartographica 10 (1973) 112
 */
function keepCorners(
  times: Float64Array,
  values: Float64Array,
  from: number,
  to: number,
  allowed: number,
  kept: number[],
): void {
  const [t0, y0] = [times[from] as number, values[from] as number];
  const slope = ((values[to] as number) - y0) / ((times[to] as number) - t0);
  let farthest = from;
  let most = allowed;
  for (let i = from + 1; i < to; i += 1) {
    const apart = Math.abs((values[i] as number) - y0 - slope * ((times[i] as number) - t0));
    if (apart > most) {
      most = apart;
      farthest = i;
    }
  }
  if (farthest > from) {
    keepCorners(times, values, from, farthest, allowed, kept);
    keepCorners(times, values, farthest, to, allowed, kept);
  } else if (to > from) kept.push(to);
}
