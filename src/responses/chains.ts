import { CodedError } from '../base/index.js';
import { inSeries, type ProcessModel } from './model.js';
import type { UnitPath } from './sampling.js';
import { type CarriedPoles, ownFactorsOf } from './shared-poles.js';

/** A response as identified: from a held source or from another measurement's true value. */
export interface Response {
  readonly from: { readonly source: number } | { readonly measurement: number };
  readonly to: number;
  readonly model: ProcessModel;
}

/**
 * Every path from a held source to a measurement, responses in series multiplied out.
 *
 * Exact: dead times add and lags multiply along a chain of linear responses, whereas sampling the
 * measurement between them would add a hold that is not there. An integrator or unstable pole of the
 * measurement between is carried along, and the path says whose it is, so that no state is counted twice.
 * @throws {CodedError} STRUCTURE_UNSUPPORTED  a ring of measurements
 */
export function pathsOf(responses: readonly Response[], measurementCount: number): UnitPath[] {
  const into: Response[][] = Array.from({ length: measurementCount }, () => []);
  for (const response of responses) into[response.to]?.push(response);
  const done: (UnitPath[] | undefined)[] = new Array(measurementCount).fill(undefined);
  const open = new Set<number>();

  const visit = (measurement: number): UnitPath[] => {
    const known = done[measurement];
    if (known !== undefined) return known;
    if (open.has(measurement)) {
      throw new CodedError(
        'STRUCTURE_UNSUPPORTED',
        'measurements that answer each other in a ring',
      );
    }
    open.add(measurement);
    const paths: UnitPath[] = [];
    for (const response of into[measurement] ?? []) {
      const { from, model } = response;
      if ('source' in from) {
        paths.push({ source: from.source, measurement, model });
        continue;
      }
      for (const upstream of visit(from.measurement)) {
        const carried = carriedBy(upstream);
        paths.push({
          source: upstream.source,
          measurement,
          model: inSeries(upstream.model, model),
          ...(carried.length > 0 ? { carried } : {}),
        });
      }
    }
    open.delete(measurement);
    done[measurement] = paths;
    return paths;
  };
  return Array.from({ length: measurementCount }, (_, m) => visit(m)).flat();
}

/** The unstable poles that a path hands on to what its measurement moves, each with its owner. */
function carriedBy(path: UnitPath): readonly CarriedPoles[] {
  const carried = path.carried ?? [];
  const own = ownFactorsOf(path);
  return own.length > 0 ? [...carried, { owner: path.measurement, factors: own }] : carried;
}
