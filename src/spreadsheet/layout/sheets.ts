import { bareWords, type Field, type FieldPath } from './field.js';
import { actuatorFields, disturbanceFields, measurementFields } from './instrument-fields.js';
import { searchFields, unitFields, unitLimitFields } from './key-fields.js';
import { feedforwardFields, loopFields } from './loop-fields.js';
import { modelFields, responseFields, stepFields } from './response-fields.js';

/** How a sheet is laid out: a heading a row, a heading a column, blocks of matrices, or values below heads. */
type SheetShape = 'keys' | 'table' | 'matrix' | 'columns';

/** One sheet, and the part of the document it holds. */
export interface SheetLayout {
  readonly name: string;
  readonly shape: SheetShape;
  readonly fields: readonly Field[];
  readonly path: FieldPath;
  readonly note: string;
}

const sheet = (
  name: string,
  shape: SheetShape,
  fields: readonly Field[],
  path: FieldPath,
  note: string,
): SheetLayout => ({ name, shape, fields, path, note });

export const layouts = {
  unit: sheet('unit', 'keys', unitFields, ['unit'], 'What the unit is called, and its time unit.'),
  measurements: sheet(
    'measurements',
    'table',
    measurementFields,
    ['unit', 'measurements'],
    'One transmitter a row.',
  ),
  actuators: sheet(
    'actuators',
    'table',
    actuatorFields,
    ['unit', 'actuators'],
    'One final element a row.',
  ),
  disturbances: sheet(
    'disturbances',
    'table',
    disturbanceFields,
    ['unit', 'disturbances'],
    'What moves measurements and no loop moves, one a row.',
  ),
  responses: sheet(
    'responses',
    'table',
    responseFields,
    ['unit', 'responses'],
    'One identified response a row.',
  ),
  matrix: sheet(
    'response matrix',
    'matrix',
    modelFields,
    ['unit', 'responses'],
    'The same as matrices: a block has what its numbers are in its corner, causes along its top, measurements down its side.',
  ),
  steps: sheet(
    'step responses',
    'columns',
    stepFields,
    ['unit', 'responses'],
    'The values of step responses, one response a column.',
  ),
  loops: sheet('loops', 'table', loopFields, ['loops'], 'One controller a row.'),
  feedforward: sheet(
    'feedforward',
    'table',
    feedforwardFields,
    ['loops'],
    'Known terms added to the output of a loop, one a row.',
  ),
  unitLimits: sheet(
    'unit limits',
    'keys',
    unitLimitFields,
    ['unitLimits'],
    'What must hold for the unit as a whole.',
  ),
  search: sheet('search', 'keys', searchFields, ['search'], 'What to look for and how hard.'),
} as const;

export type LayoutName = keyof typeof layouts;

const byName = new Map(
  Object.entries(layouts).map(([key, layout]) => [bareWords(layout.name), key as LayoutName]),
);

/** The layout of a sheet by its name. */
export const layoutNamed = (name: string): LayoutName | undefined => byName.get(bareWords(name));

/** Sheets and columns of this name are for people. */
export const isForPeople = (name: string): boolean =>
  /^(notes?|comments?|remarks?)/.test(bareWords(name));
/** A column of this heading is for people. */
export const isRemark = (heading: string): boolean =>
  /^(notes?|comments?|remarks?)$/.test(bareWords(heading));

export const sheetNames = Object.values(layouts).map(({ name }) => name);
