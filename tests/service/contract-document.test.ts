import { readdirSync, readFileSync } from 'node:fs';
import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  describeFault,
  documentSizeFault,
  jobSchema,
  mostDocumentBytes,
  readJob,
} from '../../src/contract/index.js';
import {
  acceptedJob,
  exampleJob,
  exampleWith,
  faultsOf,
  type Loose,
  refusalOf,
} from '../documents.js';
import { generatedJob } from './generated-job.js';

type Place = readonly (string | number)[];

/** Every place of a document that holds no list or object, and every place that holds an object. */
function placesIn(value: Loose, path: Place = []): { leaves: Place[]; objects: Place[] } {
  if (typeof value !== 'object' || value === null) return { leaves: [path], objects: [] };
  const parts = Object.keys(value).map((key) =>
    placesIn(value[key], [...path, Array.isArray(value) ? Number(key) : key]),
  );
  return {
    leaves: parts.flatMap((part) => part.leaves),
    objects: [...(Array.isArray(value) ? [] : [path]), ...parts.flatMap((part) => part.objects)],
  };
}

const textOf = (path: Place): string =>
  path
    .map((step) => (typeof step === 'number' ? `[${step}]` : `.${step}`))
    .join('')
    .replace(/^\./, '');

function holderOf(document: Loose, path: Place): Loose {
  let holder = document;
  for (const step of path) holder = holder[step];
  return holder;
}

const names = new Set<string | number | undefined>([
  'tag',
  'from',
  'to',
  'measurement',
  'drives',
  'loop',
  'setpointOf',
]);

describe('A job document', () => {
  it('is accepted with what it leaves out settled', () => {
    const job = acceptedJob(exampleWith((document) => delete document.search));
    expect(job.search).toEqual({
      objectives: ['speed', 'robustness'],
      alternatives: 24,
      effort: 'standard',
      models: 8,
      seed: 1,
      upsetWeights: { setpoint: 0.2, load: 1, disturbance: 1 },
    });
    expect(job.loops[1]).toMatchObject({
      goal: 'tight',
      maxChange: 4,
      feedforward: [],
      controller: {
        form: 'ideal',
        gainIn: 'percent',
        integralIn: 'time',
        derivativeIn: 'time',
        timeUnit: 'min',
        scanUnit: 's',
        setpointWeight: 1,
        derivativeOn: 'measurement',
        derivativeGain: 10,
        filterOrder: 1,
      },
    });
    expect(job.loops[1]).not.toHaveProperty('weight');
    expect(job.unit.measurements.map(({ at }) => at)).toEqual([80, 8, 50, 2]);
  });

  it('is accepted whatever valid unit it describes', () => {
    fc.assert(
      fc.property(generatedJob, (document) => {
        const read = readJob(JSON.stringify(document));
        expect(read.ok ? [] : read.faults).toEqual([]);
      }),
    );
  });

  it('is accepted again, unchanged, once its defaults are written out', () => {
    fc.assert(
      fc.property(generatedJob, (document) => {
        const job = acceptedJob(document);
        expect(acceptedJob(job)).toEqual(job);
      }),
    );
  });

  it('is accepted as bytes, as text, and with a byte order mark', () => {
    const text = JSON.stringify(exampleJob());
    for (const form of [text, `\ufeff${text}`, new TextEncoder().encode(`\ufeff${text}`)]) {
      expect(readJob(form)).toEqual(readJob(text));
    }
  });

  it('is refused with exactly the place of any one value that is of the wrong type', () => {
    fc.assert(
      fc.property(generatedJob, fc.nat(), (document, pick) => {
        const { leaves } = placesIn(document);
        const place = leaves[pick % leaves.length] ?? [];
        if (names.has(place.at(-1))) return;
        const changed: Loose = structuredClone(document);
        holderOf(changed, place.slice(0, -1))[place.at(-1) ?? ''] = [true];
        expect(refusalOf(changed).faults.map((fault) => fault.path)).toEqual([textOf(place)]);
      }),
    );
  });

  it('is refused with exactly the place of any one key it does not know', () => {
    fc.assert(
      fc.property(generatedJob, fc.nat(), (document, pick) => {
        const { objects } = placesIn(document);
        const place = objects[pick % objects.length] ?? [];
        const changed: Loose = structuredClone(document);
        holderOf(changed, place)['surplus'] = 1;
        const path = textOf([...place, 'surplus']);
        expect(faultsOf(changed)).toEqual([`KEY_UNKNOWN ${path}`]);
      }),
    );
  });

  it('is refused at any one key whose absence is a fault, and accepted without any other', () => {
    fc.assert(
      fc.property(generatedJob, fc.nat(), (document, pick) => {
        const { leaves } = placesIn(document);
        const place = leaves[pick % leaves.length] ?? [];
        if (typeof place.at(-1) === 'number' || names.has(place.at(-1))) return;
        const changed: Loose = structuredClone(document);
        delete holderOf(changed, place.slice(0, -1))[place.at(-1) ?? ''];
        const read = readJob(JSON.stringify(changed));
        const needed = !jobSchema.safeParse(changed).success;
        if (needed) expect(read).toMatchObject({ ok: false, faults: [{ path: textOf(place) }] });
        else if (!read.ok) expect(read.faults.map(({ code }) => code)).not.toContain('KEY_MISSING');
      }),
    );
  });

  it('has all its faults reported at once, how parts belong together included', () => {
    const faults = faultsOf(
      exampleWith((job) => {
        job.unit.horizon = 'long';
        job.unit.actuators[0].at = 400;
        job.unit.responses[5].from = 'RAIN';
        job.loops[0].limits.overshoot = -1;
        job.loops[0].drives = { loop: 'FC-999' };
        job.loops[1].present.gain = 0;
        job.loops[3].controller.form = 'serial';
        job.loops[3].measurement = 'PI-999';
        job.search.models = 0;
        job.search.objectives = ['speed'];
      }),
    );
    expect([...faults].sort()).toEqual(
      [
        'VALUE_TYPE unit.horizon',
        'OUTSIDE_RANGE unit.actuators[0].at',
        'REFERENCE_UNKNOWN unit.responses[5].from',
        'POINT_MISMATCH unit.operatingPoints[0].responses',
        'POINT_MISMATCH unit.operatingPoints[0].responses[5]',
        'VALUE_RANGE loops[0].limits.overshoot',
        'REFERENCE_UNKNOWN loops[0].drives.loop',
        'SETTING_SIGN loops[1].present.gain',
        'VALUE_CHOICE loops[3].controller.form',
        'REFERENCE_UNKNOWN loops[3].measurement',
        'VALUE_RANGE search.models',
        'OBJECTIVES_INCOMPLETE search.objectives',
      ].sort(),
    );
  });

  it('is not blamed for what only a faulty entry keeps from being seen', () => {
    const broken = (change: (job: Loose) => void) => faultsOf(exampleWith(change));
    expect(
      broken((job) => {
        job.unit.responses[0].model.gain = 'x';
      }),
    ).toEqual(['VALUE_TYPE unit.responses[0].model.gain']);
    expect(
      broken((job) => {
        job.loops[1].controller.scan = 0;
      }),
    ).toEqual(['VALUE_RANGE loops[1].controller.scan']);
    expect(
      broken((job) => {
        job.unit.operatingPoints[0].responses[0].to = 1;
      }),
    ).toEqual(['VALUE_TYPE unit.operatingPoints[0].responses[0].to']);
  });

  it('with 65 loops has one fault, not one for each', () => {
    const faults = faultsOf(
      exampleWith((job) => {
        job.loops = Array.from({ length: 65 }, (_, index) => ({
          ...job.loops[3],
          tag: `L${index}`,
        }));
        job.unit.responses.splice(3, 1);
        job.unit.operatingPoints = [];
      }),
    );
    expect(faults).toEqual(['LIST_LENGTH loops']);
  });

  it('has at most 200 faults listed and the others counted', () => {
    const refusal = refusalOf(
      exampleWith((job) => {
        job.unit.responses = Array.from({ length: 300 }, () => ({}));
        job.unit.operatingPoints = [];
      }),
    );
    expect(refusal.faults).toHaveLength(200);
    expect(refusal.more).toBe(3 * 300 - 200);
  });

  it.each([
    ['of empty responses', () => ({})],
    ['of responses that are numbers', () => 0],
    ['of responses with a dozen unknown keys', () => ({ ...Array(12).fill(1) })],
  ])('that holds operating points full %s is looked at only until it is refused', (_, entry) => {
    const responses = Array.from({ length: 1000 }, entry);
    const refusal = refusalOf(
      exampleWith((job) => {
        const points = Array.from({ length: 64 }, (__, index) => ({
          name: `P${index}`,
          responses,
        }));
        job.unit.operatingPoints = points;
      }),
    );
    expect(refusal.faults).toHaveLength(200);
    expect(refusal.more).toBeLessThan(20_000);
  });

  it('of many responses costs its size, not its square', () => {
    const tags = Array.from({ length: 64 }, (_, index) => `${index}`);
    const responses = tags.flatMap((u) =>
      tags.map((y) => ({
        from: `U${u}`,
        to: `Y${y}`,
        model: { kind: 'first-order', gain: 1, timeConstant: 2 },
      })),
    );
    const job = acceptedJob(
      exampleWith((document) => {
        document.unit = {
          name: 'a mesh',
          timeUnit: 'min',
          measurements: tags.map((y) => ({ tag: `Y${y}`, unit: '%', low: 0, high: 1 })),
          actuators: tags.map((u) => ({ tag: `U${u}`, unit: '%', low: 0, high: 1, at: 0 })),
          responses,
          operatingPoints: ['summer', 'winter'].map((name) => ({ name, responses })),
        };
        document.loops = tags.map((tag) => ({
          tag,
          measurement: `Y${tag}`,
          drives: `U${tag}`,
          controller: { terms: 'PI', scan: 1 },
          present: { gain: 1, integral: 1 },
        }));
      }),
    );
    expect(job.unit.responses).toHaveLength(4096);
  });

  it('has a fault put in one printable line, however long and strange the value', () => {
    fc.assert(
      fc.property(fc.string({ unit: 'binary', maxLength: 500 }), (odd) => {
        const refusal = refusalOf(
          exampleWith((job) => {
            job.unit.timeUnit = `~${odd}`;
            job.loops[0].present[`~${odd}`] = 1;
          }),
        );
        for (const fault of refusal.faults) {
          const line = describeFault(fault);
          expect(line).toMatch(/^[^\p{C}\p{Zl}\p{Zp}]+$/u);
          expect(line.length).toBeLessThan(700);
        }
      }),
    );
  });

  it('is refused for its size before its text is looked at', () => {
    expect(documentSizeFault(mostDocumentBytes)).toBeUndefined();
    expect(documentSizeFault(mostDocumentBytes + 1)?.code).toBe('DOCUMENT_TOO_LARGE');
    const bytes = new Uint8Array(mostDocumentBytes + 1);
    expect(readJob(bytes)).toMatchObject({ ok: false, faults: [{ code: 'DOCUMENT_TOO_LARGE' }] });
  });
});

describe('The schema code', () => {
  it('runs in a browser: it imports nothing but zod, the base and itself', () => {
    const folder = new URL('../../src/contract/', import.meta.url);
    const sources = readdirSync(folder, { recursive: true, encoding: 'utf8' })
      .filter((file) => file.endsWith('.ts'))
      .map((file) => readFileSync(new URL(file, folder), 'utf8'));
    const imported = sources.flatMap((text) =>
      [...text.matchAll(/from '([^']+)'/g)].map((m) => m[1]),
    );
    expect(imported.length).toBeGreaterThan(50);
    for (const from of imported)
      expect(from).toMatch(
        /^(zod|\.{1,2}\/[a-z-]+\.js|\.\/service\/[a-z-]+\.js|\.\.\/base\/index\.js)$/,
      );
  });
});
