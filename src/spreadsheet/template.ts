import type { Grid, GridSheet, JobInput } from '../contract/index.js';
import { gridOf } from './document-grid.js';
import { layouts } from './layout/sheets.js';

/** An invented unit that shows most of what a spreadsheet can say, and checks clean. */
const templateJob: JobInput = {
  format: 'heddle-job/1',
  unit: {
    name: 'Invented example: wash water heater',
    timeUnit: 'min',
    horizon: 60,
    measurements: [
      { tag: 'TI-201', unit: 'degC', low: 20, high: 95, at: 68, noise: 0.05 },
      { tag: 'FI-202', unit: 't/h', low: 0, high: 8, at: 3, noise: 0.02 },
      { tag: 'LI-203', unit: '%', low: 0, high: 100, at: 55, noise: 0.2 },
    ],
    actuators: [
      { tag: 'FV-202', unit: '%', low: 0, high: 100, at: 44, rateLimit: 300 },
      { tag: 'LV-203', unit: '%', low: 0, high: 100, at: 50, rateLimit: 300 },
    ],
    disturbances: [{ tag: 'WATER-IN', unit: 't/h', step: 2 }],
    responses: [
      {
        from: 'FV-202',
        to: 'FI-202',
        model: { kind: 'first-order', gain: 0.08, timeConstant: 0.12, deadTime: 0.03 },
        spread: { gain: 0.15, timeConstant: 0.15, deadTime: 0.2 },
      },
      {
        from: 'FI-202',
        to: 'TI-201',
        model: { kind: 'second-order', gain: 9, timeConstants: [5, 0.8], deadTime: 0.7 },
        spread: { gain: 0.2, timeConstant: 0.15, deadTime: 0.2 },
      },
      {
        from: 'WATER-IN',
        to: 'TI-201',
        model: { kind: 'first-order', gain: -2.4, timeConstant: 6, deadTime: 1.2 },
        spread: { gain: 0.2, timeConstant: 0.15, deadTime: 0.2 },
      },
      {
        from: 'WATER-IN',
        to: 'LI-203',
        model: { kind: 'integrating', rate: 0.5, timeConstant: 0.6, deadTime: 0.2 },
        spread: { gain: 0.15, timeConstant: 0.2, deadTime: 0.2 },
      },
      {
        from: 'LV-203',
        to: 'LI-203',
        model: { kind: 'integrating', rate: -0.09, timeConstant: 0.15, deadTime: 0.03 },
        spread: { gain: 0.15, timeConstant: 0.2, deadTime: 0.2 },
      },
    ],
  },
  loops: [
    {
      tag: 'TC-201',
      measurement: 'TI-201',
      drives: { loop: 'FC-202' },
      controller: { terms: 'PID', timeUnit: 'min', scan: 1, scanUnit: 's' },
      present: { gain: 1.1, integral: 6, derivative: 0, filter: 0.05 },
      tolerance: 0.5,
      setpointStep: 1,
      limits: { overshoot: 15, outputNoise: 0.1 },
    },
    {
      tag: 'FC-202',
      measurement: 'FI-202',
      drives: 'FV-202',
      controller: {
        terms: 'PI',
        gainIn: 'proportional-band',
        timeUnit: 's',
        scan: 1,
        scanUnit: 's',
      },
      present: { gain: 200, integral: 8 },
      tolerance: 0.1,
      setpointStep: 0.2,
      loadStep: 5,
      limits: { overshoot: 25, outputNoise: 0.8 },
    },
    {
      tag: 'LC-203',
      measurement: 'LI-203',
      drives: 'LV-203',
      goal: 'averaging',
      action: 'direct',
      controller: { terms: 'PI', integralIn: 'repeats', timeUnit: 'min', scan: 1, scanUnit: 's' },
      present: { gain: 2, integral: 0.05 },
      setpointStep: 0,
      limits: { levelBand: 20, outputNoise: 1 },
    },
  ],
  unitLimits: { anySingleLoopInManual: true },
  search: { alternatives: 12, effort: 'quick', models: 8, seed: 1 },
};

const introduction = [
  'A job for Heddle. Put your unit in place of the example, sheet by sheet.',
  'Headings may stand in any order, and those you do not need may go. An empty cell says nothing: what it means then stands in its note.',
  'Numbers have a decimal point and no units; a unit may stand in brackets behind a heading, and a time unit there is checked, not converted.',
  'Sheets and columns named notes are for you and are not read. Formulas are taken by the value they were saved with.',
];

/** The cells of a job for people to fill in: its sheets, and what every heading means. */
export function templateGrid(job: JobInput = templateJob): Grid {
  return { sheets: [notesSheet(), ...gridOf(job).sheets, matrixNotes()] };
}

function notesSheet(): GridSheet {
  const headings = Object.values(layouts).flatMap(({ name, note, fields }) => [
    [null, null, null],
    [name, null, note],
    ...fields.map((field) => {
      const choices = field.choices === undefined ? '' : ` (${field.choices.join(', ')})`;
      return [null, field.heading, `${field.note}${choices}`];
    }),
  ]);
  const rows = [
    ...introduction.map((line) => [line]),
    [null, null, null],
    ['sheet', 'heading', 'what it means'],
    ...headings,
  ];
  return { name: 'notes', firstRow: 1, rows };
}

/** How responses look as matrices; as a sheet of its own it is named response matrix. */
function matrixNotes(): GridSheet {
  const rows = [
    ['gain; time constant; dead time', 'FV-202', 'WATER-IN'],
    ['FI-202', '0.08; 0.12; 0.03', null],
    ['TI-201', null, '-2.4; 6; 1.2'],
    [],
    ['rate', 'LV-203', 'WATER-IN'],
    ['LI-203', -0.09, 0.5],
    [],
    ['time constant', 'LV-203', 'WATER-IN'],
    ['LI-203', 0.15, 0.6],
    [],
    [
      'The sheet response matrix says the same as rows of the sheet responses, and may stand beside it or instead of it.',
    ],
    [
      'The corner of a block names what its numbers are; an empty row ends a block; an empty cell is no response.',
    ],
  ];
  return { name: 'notes on matrices', firstRow: 1, rows };
}
