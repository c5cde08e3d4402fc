import type { z } from 'zod';
import { type Path, valueAt } from './findings.js';
import { actuatorSchema, disturbanceSchema, measurementSchema } from './instruments.js';
import { type LoopAsWritten, loopSchema } from './loops.js';
import { type ResponseDocument, responseSchema } from './responses.js';
import { type TimeUnit, timeUnitSchema } from './scalars.js';
import { type SearchDocument, searchSchema } from './search.js';
import { mostOf, unitSchema } from './unit.js';

/** One readable entry of a list, where it stands, and which of its keys could not be read. */
export interface Entry<Value> {
  readonly path: Path;
  readonly value: Value;
  readonly lost: ReadonlySet<PropertyKey>;
}

/** A list of the document: its readable entries, and whether these are all. */
export interface Listed<Value> {
  readonly path: Path;
  readonly entries: readonly Entry<Value>[];
  readonly complete: boolean;
}

interface PointDraft {
  readonly path: Path;
  readonly name: unknown;
  readonly responses: Listed<ResponseDocument>;
}

/**
 * As much of a job document as can be read, so that how its parts belong together can be judged
 * even where some of them are faulty. An entry whose faults can be cut out stands without them.
 */
export interface Draft {
  readonly timeUnit: TimeUnit | undefined;
  readonly horizon: number | undefined;
  readonly measurements: Listed<z.output<typeof measurementSchema>>;
  readonly actuators: Listed<z.output<typeof actuatorSchema>>;
  readonly disturbances: Listed<z.output<typeof disturbanceSchema>>;
  readonly responses: Listed<ResponseDocument>;
  readonly points: readonly PointDraft[];
  readonly loops: Listed<LoopAsWritten>;
  readonly search: SearchDocument | undefined;
  /** Every tag written, even in entries that cannot be read. */
  readonly tags: {
    readonly [kind in 'measurements' | 'actuators' | 'disturbances' | 'loops']: ReadonlySet<string>;
  };
}

const pointsPath: Path = ['unit', 'operatingPoints'];

/** Reads what can be read of a document. */
export function draftOf(written: unknown): Draft {
  const list = <Schema extends z.ZodType>(path: Path, schema: Schema, most: number) =>
    listed(itemsAt(written, path, most), path, schema);
  const horizon = unitSchema.shape.horizon.safeParse(valueAt(written, ['unit', 'horizon']));
  const search = salvaged(searchSchema, valueAt(written, ['search']) ?? {});
  const tags = (path: Path) => tagsIn(valueAt(written, path));
  return {
    timeUnit: timeUnitSchema.safeParse(valueAt(written, ['unit', 'timeUnit'])).data,
    horizon: horizon.data,
    measurements: list(['unit', 'measurements'], measurementSchema, mostOf.measurements),
    actuators: list(['unit', 'actuators'], actuatorSchema, mostOf.actuators),
    disturbances: list(['unit', 'disturbances'], disturbanceSchema, mostOf.disturbances),
    responses: list(['unit', 'responses'], responseSchema, mostOf.responses),
    points: (itemsAt(written, pointsPath, mostOf.operatingPoints) ?? []).map((point, index) => {
      const path = [...pointsPath, index];
      return {
        path,
        name: valueAt(point, ['name']),
        responses: list([...path, 'responses'], responseSchema, mostOf.responses),
      };
    }),
    loops: list(['loops'], loopSchema, mostOf.loops),
    search: search?.value,
    tags: {
      measurements: tags(['unit', 'measurements']),
      actuators: tags(['unit', 'actuators']),
      disturbances: tags(['unit', 'disturbances']),
      loops: tags(['loops']),
    },
  };
}

/** The entries of a list, none where it is absent; undefined where it is no list or far too long. */
function itemsAt(written: unknown, path: Path, most: number): readonly unknown[] | undefined {
  const list = valueAt(written, path);
  if (list === undefined) return [];
  return Array.isArray(list) && list.length <= most ? list : undefined;
}

function tagsIn(list: unknown): ReadonlySet<string> {
  const tags = new Set<string>();
  for (const entry of Array.isArray(list) ? list : []) {
    const tag = valueAt(entry, ['tag']);
    if (typeof tag === 'string') tags.add(tag);
  }
  return tags;
}

function listed<Schema extends z.ZodType>(
  items: readonly unknown[] | undefined,
  path: Path,
  schema: Schema,
): Listed<z.output<Schema>> {
  if (items === undefined) return { path, entries: [], complete: false };
  const entries = items.flatMap((item, index) => {
    const read = salvaged(schema, item);
    return read === undefined ? [] : [{ path: [...path, index], ...read }];
  });
  return { path, entries, complete: entries.length === items.length };
}

/** The entry, if need be without the keys at fault; undefined where those are required. */
function salvaged<Schema extends z.ZodType>(
  schema: Schema,
  item: unknown,
): { value: z.output<Schema>; lost: ReadonlySet<PropertyKey> } | undefined {
  const first = schema.safeParse(item);
  if (first.success) return { value: first.data, lost: new Set() };
  const rest: unknown = structuredClone(item);
  const lost = new Set<PropertyKey>();
  for (const issue of first.error.issues) {
    const place = cutOf(issue.path);
    const keys = issue.code === 'unrecognized_keys' ? issue.keys : [place.pop() ?? ''];
    const holder = valueAt(rest, place);
    for (const key of keys) {
      lost.add(place[0] ?? key);
      if (typeof holder === 'object' && holder !== null) Reflect.deleteProperty(holder, key);
    }
  }
  const second = schema.safeParse(rest);
  return second.success ? { value: second.data, lost } : undefined;
}

/** The place to cut for a fault: the faulty key, or the list it stands in. */
function cutOf(path: Path): PropertyKey[] {
  const inList = path.findIndex((step) => typeof step === 'number');
  return path.slice(0, inList === -1 ? path.length : inList);
}
