import { CodedError } from '../base/index.js';
import { inSeries, isUnstableFactor, type ProcessModel } from './model.js';
import type { UnitPath } from './sampling.js';

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
 * measurement between them would add a hold that is not there.
 * @throws {CodedError} STRUCTURE_UNSUPPORTED  a ring of measurements, or a chain through a measurement
 *   with an integrator or unstable pole (its state would be counted twice)
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
        if (upstream.model.factors.some(isUnstableFactor)) {
          throw new CodedError(
            'STRUCTURE_UNSUPPORTED',
            'a response from a measurement that is itself integrating or unstable',
          );
        }
        paths.push({
          source: upstream.source,
          measurement,
          model: inSeries(upstream.model, model),
        });
      }
    }
    open.delete(measurement);
    done[measurement] = paths;
    return paths;
  };
  return Array.from({ length: measurementCount }, (_, m) => visit(m)).flat();
}
