import { Random } from '../base/index.js';
import {
  integrates,
  isIntegrator,
  isUnstableFactor,
  type Response,
  varyModel,
} from '../responses/index.js';

/** A response with how far its gain, lags and dead time may lie from nominal, as fractions. */
export interface UncertainResponse extends Response {
  readonly spread: { readonly gain: number; readonly lag: number; readonly deadTime: number };
  /** Drawn by itself instead of by one factor per source and one per measurement. */
  readonly independent: boolean;
  /** Numbers the source among all sources and measurements, for the factor that they share. */
  readonly sourceKey: number;
}

/** Where in its range each uncertain quantity stands: -1 low, 0 nominal, 1 high. */
interface Draw {
  readonly source: (key: number) => number;
  readonly measurement: (index: number) => number;
  /** Of response number r: its own gain (when independent), lag and dead time. */
  readonly own: (r: number, what: 'gain' | 'lag' | 'deadTime') => number;
}

const factorOf = (spread: number, position: number): number =>
  Math.exp(Math.log1p(spread) * position);

/**
 * One variant of the unit.
 *
 * Gains move by one factor per source and one per measurement, exp(ln(1 + s)(a + b) / 2), which
 * leaves the relative gains alone where spreads are equal. Integrators into one measurement are one
 * state and move together, and so do equal unstable poles.
 */
function vary(responses: readonly UncertainResponse[], draw: Draw): Response[] {
  return responses.map((response, r) => {
    const { spread, to, model } = response;
    const shared = integrates(model);
    const unstable = model.factors.some((f) => isUnstableFactor(f) && !isIntegrator(f));
    const b = draw.measurement(to);
    let gain: number;
    if (response.independent) gain = draw.own(r, 'gain');
    else gain = shared ? b : (draw.source(response.sourceKey) + b) / 2;
    const lag = unstable ? b : draw.own(r, 'lag');
    return {
      from: response.from,
      to,
      model: varyModel(
        model,
        factorOf(spread.gain, gain),
        factorOf(spread.lag, lag),
        factorOf(spread.deadTime, draw.own(r, 'deadTime')),
      ),
    };
  });
}

/** All gains at one end, all lags at another, all dead times at a third. */
const corner = (gain: number, lag: number, deadTime: number): Draw => ({
  source: () => gain,
  measurement: () => gain,
  own: (_, what) => (what === 'gain' ? gain : what === 'lag' ? lag : deadTime),
});

/** The same for what reaches one measurement, the rest nominal. */
function cornerAt(
  responses: readonly UncertainResponse[],
  measurement: number,
  sourceKey: number,
  gain: number,
  lag: number,
): Draw {
  return {
    source: (key) => (key === sourceKey ? gain : 0),
    measurement: (index) => (index === measurement ? gain : 0),
    own: (r, what) => {
      if (responses[r]?.to !== measurement) return 0;
      return what === 'gain' ? gain : what === 'lag' ? lag : 1;
    },
  };
}

/** Draws that fill the ranges evenly: one in each of `count` layers of every quantity. */
function latinDraws(
  count: number,
  sources: number,
  measurements: number,
  responses: number,
  random: Random,
): Draw[] {
  const layers = (): Float64Array => {
    const order = random.permutation(count);
    return Float64Array.from(order, (layer) => (2 * (layer + random.uniform())) / count - 1);
  };
  const bySource = Array.from({ length: sources }, layers);
  const byMeasurement = Array.from({ length: measurements }, layers);
  const byResponse = Array.from({ length: responses }, () => ({
    gain: layers(),
    lag: layers(),
    deadTime: layers(),
  }));
  return Array.from({ length: count }, (_, k) => ({
    source: (key: number) => bySource[key]?.[k] ?? 0,
    measurement: (index: number) => byMeasurement[index]?.[k] ?? 0,
    own: (r: number, what: 'gain' | 'lag' | 'deadTime') => byResponse[r]?.[what][k] ?? 0,
  }));
}

/** The unit as identified: nominal, further operating points, and what is uncertain about them. */
export interface UncertainUnit {
  /** The nominal responses first, then those of each further operating point. */
  readonly points: readonly (readonly UncertainResponse[])[];
  readonly sourceKeys: number;
  readonly measurements: number;
  /** Measurement and source key of each retuned loop that drives an actuator. */
  readonly retuned: readonly { readonly measurement: number; readonly sourceKey: number }[];
}

/**
 * The models the search works on: nominal first, further operating points, the extremes of the whole
 * unit, the extremes of each retuned loop where there is room for all of them, and a space-filling
 * sample for the rest.
 * @param count  how many models; never fewer than there are operating points
 */
export function searchModels(unit: UncertainUnit, count: number, seed: number): Response[][] {
  const nominal = unit.points.map((point) => vary(point, corner(0, 0, 0)));
  const draws: Draw[] = [corner(1, -1, 1), corner(-1, 1, 1), corner(1, 1, 1), corner(-1, -1, -1)];
  if (count >= nominal.length + draws.length + 2 * unit.retuned.length) {
    const responses = unit.points[0] as readonly UncertainResponse[];
    for (const { measurement, sourceKey } of unit.retuned) {
      draws.push(cornerAt(responses, measurement, sourceKey, 1, -1));
      draws.push(cornerAt(responses, measurement, sourceKey, -1, 1));
    }
  }
  const rest = Math.max(0, count - nominal.length);
  const taken = draws.slice(0, rest);
  return nominal.concat(
    spreadOver(unit, [...taken, ...sample(unit, rest - taken.length, new Random(seed, 1))]),
  );
}

/** Models never seen by the search: a space-filling sample of their own stream. */
export function freshModels(
  unit: UncertainUnit,
  count: number,
  seed: number,
  ...stream: readonly number[]
): Response[][] {
  return spreadOver(unit, sample(unit, count, new Random(seed, 2, ...stream)));
}

function sample(unit: UncertainUnit, count: number, random: Random): Draw[] {
  if (count <= 0) return [];
  const responses = unit.points[0]?.length ?? 0;
  return latinDraws(count, unit.sourceKeys, unit.measurements, responses, random);
}

/** Draws are dealt to the operating points in turn. */
const spreadOver = (unit: UncertainUnit, draws: readonly Draw[]): Response[][] =>
  draws.map((draw, k) =>
    vary(unit.points[k % unit.points.length] as readonly UncertainResponse[], draw),
  );
