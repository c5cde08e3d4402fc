import type { Grid, GridCell, GridSheet, JobInput } from '../contract/index.js';
import { textCell } from './cell-value.js';
import type { Field, FieldPath } from './layout/field.js';
import { isNominal } from './layout/limit-field.js';
import { feedforwardLoop } from './layout/loop-fields.js';
import { firstLag, operatingPointField, pairFields, stepValues } from './layout/response-fields.js';
import { layouts, type SheetLayout } from './layout/sheets.js';

type Response = JobInput['unit']['responses'][number];

/**
 * A job document as the cells that say the same.
 * Of the headings those that are usual, and those that the job has a value for.
 * @param job  valid, as its author wrote it: what is left out stays so
 */
export function gridOf(job: JobInput): Grid {
  const { unit } = job;
  const responses = [
    ...unit.responses.map((response) => ({ response, point: '' })),
    ...(unit.operatingPoints ?? []).flatMap((point) =>
      point.responses.map((response) => ({ response, point: point.name })),
    ),
  ];
  const sheets: readonly (GridSheet | undefined)[] = [
    keySheet(layouts.unit, plainCells(unit), unit.timeUnit),
    tableSheet(layouts.measurements, unit.measurements.map(plainCells), job),
    tableSheet(layouts.actuators, unit.actuators.map(plainCells), job),
    tableSheet(layouts.disturbances, (unit.disturbances ?? []).map(plainCells), job),
    tableSheet(layouts.responses, responses.map(responseCells), job),
    stepSheet(responses),
    tableSheet(layouts.loops, job.loops.map(loopCells), job),
    feedforwardSheet(job),
    keySheet(layouts.unitLimits, (field) => limitCell(job.unitLimits, field), unit.timeUnit),
    keySheet(layouts.search, plainCells(job.search), unit.timeUnit),
  ];
  return { sheets: sheets.filter((sheet) => sheet !== undefined) };
}

/** What stands in the cell of a field; null for nothing. */
type CellOf = (field: Field) => GridCell;

const plainCells =
  (entry: unknown): CellOf =>
  (field) =>
    field.path.length === 0 ? null : cellFrom(valueAt(entry, field.path), field);

function responseCells(given: { readonly response: Response; readonly point: string }): CellOf {
  const { response, point } = given;
  return (field) => {
    if (field === operatingPointField) return point === '' ? null : textCell(point);
    const isSecond = response.model.kind === 'second-order';
    const path = field === firstLag && isSecond ? ['model', 'timeConstants', 0] : field.path;
    return cellFrom(valueAt(response, path), field);
  };
}

function loopCells(loop: JobInput['loops'][number]): CellOf {
  return (field) =>
    field.path[0] === 'limits'
      ? limitCell(loop, field)
      : cellFrom(valueAt(loop, field.path), field);
}

/** A limit stated as an object that is not of the nominal model alone is a plain number. */
function limitCell(entry: unknown, field: Field): GridCell {
  const stated = isNominal(field) ? field.path.slice(0, -1) : field.path;
  const limit = valueAt(entry, stated);
  if (typeof limit !== 'object' || limit === null) {
    return isNominal(field) ? null : cellFrom(limit, field);
  }
  if ((valueAt(limit, ['nominal']) === true) !== isNominal(field)) return null;
  return cellFrom(valueAt(limit, ['max']) ?? valueAt(limit, ['min']), field);
}

function feedforwardSheet(job: JobInput): GridSheet | undefined {
  const terms = job.loops.flatMap(({ tag, feedforward }) =>
    (feedforward ?? []).map((term): CellOf => {
      const cells = plainCells(term);
      return (field) => (field === feedforwardLoop ? textCell(tag) : cells(field));
    }),
  );
  if (terms.length === 0) return undefined;
  return tableSheet(layouts.feedforward, terms, job);
}

function tableSheet(layout: SheetLayout, entries: readonly CellOf[], job: JobInput): GridSheet {
  const fields = layout.fields.filter(
    (field) => field.usual || entries.some((cellOf) => cellOf(field) !== null),
  );
  const head = fields.map((field) => headingText(field, job.unit.timeUnit));
  const rows = entries.map((cellOf) => fields.map(cellOf));
  return { name: layout.name, firstRow: 1, rows: [head, ...rows] };
}

function keySheet(layout: SheetLayout, cells: CellOf, timeUnit: string): GridSheet {
  const fields = layout.fields.filter((field) => field.usual || cells(field) !== null);
  const rows = fields.map((field) => [headingText(field, timeUnit), cells(field), field.note]);
  return { name: layout.name, firstRow: 1, rows: [['key', 'value', 'notes'], ...rows] };
}

/** The values of step responses, a column each. */
function stepSheet(
  responses: readonly { readonly response: Response; readonly point: string }[],
): GridSheet | undefined {
  const steps = responses.flatMap(({ response, point }) =>
    response.model.kind === 'step-response'
      ? [{ values: response.model.values, cellOf: responseCells({ response, point }) }]
      : [],
  );
  if (steps.length === 0) return undefined;
  const heads = [...pairFields, operatingPointField].map((field) => [
    field.heading,
    ...steps.map(({ cellOf }) => cellOf(field)),
  ]);
  const longest = Math.max(...steps.map(({ values }) => values.length));
  const rows = Array.from({ length: longest }, (_, index) => [
    index === 0 ? stepValues.heading : null,
    ...steps.map(({ values }) => values[index] ?? null),
  ]);
  return { name: layouts.steps.name, firstRow: 1, rows: [...heads, ...rows] };
}

/** A heading with the time unit of its values where that is the job's, so that it is checked. */
function headingText({ heading, time, percent }: Field, timeUnit: string): string {
  if (percent === 'figure') return `${heading} [%]`;
  return time === 'job' ? `${heading} [${timeUnit}]` : heading;
}

function cellFrom(value: unknown, field: Field): GridCell {
  if (value === undefined || value === null) return null;
  if (typeof value === 'number') return value;
  if (typeof value === 'boolean') return value ? 'yes' : 'no';
  if (Array.isArray(value)) return value.length === 1 ? single(value[0]) : value.join('; ');
  // Objects stand under headings of their own: a setpoint, an inner loop.
  if (typeof value === 'object') return null;
  if (value === '' && field.mayBeEmpty) return null;
  return textCell(String(value));
}

const single = (value: unknown): GridCell => (typeof value === 'number' ? value : String(value));

function valueAt(entry: unknown, path: FieldPath): unknown {
  let value = entry;
  for (const step of path) {
    if (typeof value !== 'object' || value === null || !Object.hasOwn(value, step))
      return undefined;
    value = (value as Record<string | number, unknown>)[step];
  }
  return value;
}
