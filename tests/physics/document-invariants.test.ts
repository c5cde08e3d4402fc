import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import type { EvaluationDocument, JobInput } from '../../src/contract/index.js';
import { drawDocument } from '../drawn/drawn-documents.js';
import { evaluationOf } from '../drawn/evaluated.js';

/** Under a short horizon: what is compared is two ways of writing one unit. */
const documents = fc.nat({ max: 2 ** 31 }).map((seed): JobInput => {
  const { unit, ...rest } = drawDocument(seed);
  return { ...rest, unit: { ...unit, horizon: (unit.horizon ?? 0) / 4 } };
});

type Figures = Readonly<Record<string, number | boolean | null>>;
const loopsOf = ({ scored }: EvaluationDocument): Readonly<Record<string, Figures>> =>
  scored.nominal.loops;

/** Peaks and crossings are closed in on to about 1e-6. */
function expectSame(got: number | boolean | null | undefined, wanted: unknown, what: string): void {
  if (typeof wanted !== 'number' || typeof got !== 'number') expect(got, what).toBe(wanted);
  else expect(Math.abs(got - wanted), what).toBeLessThan(1e-5 * Math.abs(wanted) + 1e-7);
}

const scaleFree = [
  'peakSensitivity',
  'peakComplementary',
  'gainMargin',
  'gainReduction',
  'phaseMargin',
  'overshoot',
  'upsetToOthers',
  'stableInManual',
];

describe('the figures of a unit', () => {
  it('do not depend on the order in which its parts are written', () => {
    fc.assert(
      fc.property(documents, (document) => {
        const { unit, loops } = document;
        const turned = {
          ...document,
          unit: {
            ...unit,
            measurements: unit.measurements.toReversed(),
            actuators: unit.actuators.toReversed(),
            responses: unit.responses.toReversed(),
          },
          loops: loops.toReversed(),
        };
        const [one, other] = [loopsOf(evaluationOf(document)), loopsOf(evaluationOf(turned))];
        for (const [tag, figures] of Object.entries(one)) {
          for (const [key, value] of Object.entries(figures))
            expectSame(other[tag]?.[key], value, `${tag} ${key}`);
        }
      }),
      { numRuns: 12 },
    );
  });

  it('do not depend on the units of its measurements, but for what is stated in them', () => {
    const percent = documents.filter(({ loops }) =>
      loops.every(({ controller }) => controller.gainIn !== 'engineering'),
    );
    fc.assert(
      fc.property(percent, fc.constantFrom(0.01, 7, 1000), (document, factor) => {
        const [one, other] = [
          loopsOf(evaluationOf(document)),
          loopsOf(evaluationOf(inOtherUnits(document, factor))),
        ];
        for (const [tag, figures] of Object.entries(one)) {
          for (const key of scaleFree) expectSame(other[tag]?.[key], figures[key], `${tag} ${key}`);
          const { iae, peakDeviation } = figures;
          for (const [key, value] of Object.entries({ iae, peakDeviation })) {
            const wanted = typeof value === 'number' ? factor * value : value;
            expectSame(other[tag]?.[key], wanted, `${tag} ${key}`);
          }
        }
      }),
      { numRuns: 12 },
    );
  });
});

/** All PVs times a factor: ranges, noise, steps, and what moves them from outside. */
function inOtherUnits(document: JobInput, factor: number): JobInput {
  const { unit, loops } = document;
  const measured = new Set(unit.measurements.map(({ tag }) => tag));
  return {
    ...document,
    unit: {
      ...unit,
      measurements: unit.measurements.map(({ low, high, noise = 0, ...rest }) => ({
        ...rest,
        low: low * factor,
        high: high * factor,
        noise: noise * factor,
      })),
      responses: unit.responses.map((response) =>
        typeof response.from === 'string' && measured.has(response.from)
          ? response
          : { ...response, model: times(response.model, factor) },
      ),
    },
    loops: loops.map(({ tolerance = 0, setpointStep = 0, ...rest }) => ({
      ...rest,
      tolerance: tolerance * factor,
      setpointStep: setpointStep * factor,
    })),
  };
}

type Model = JobInput['unit']['responses'][number]['model'];

function times(model: Model, factor: number): Model {
  switch (model.kind) {
    case 'first-order':
    case 'second-order':
      return { ...model, gain: model.gain * factor };
    case 'integrating':
      return { ...model, rate: model.rate * factor };
    case 'transfer-function':
      return { ...model, numerator: model.numerator.map((c) => c * factor) };
    case 'step-response':
      return { ...model, values: model.values.map((y) => y * factor) };
  }
}
