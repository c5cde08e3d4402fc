import type {
  ChangeRecord,
  Expectation,
  SheetDocument,
  SheetLoop,
  SheetSetting,
} from '../../contract/index.js';
import { counted, figure, fixed, noFigure, significant } from './figures.js';
import { type Column, grid, indented } from './grid.js';
import type { Paper } from './paper.js';
import { facts, page, remarks, section, wrapped } from './prose.js';

/** A change sheet as people read it, and as it goes on paper into the control room. */
export function sheetPage(sheet: SheetDocument, paper: Paper): string {
  const changing = sheet.loops.filter(({ changes }) => changes);
  return page([
    heading(sheet, paper),
    section('What to mind', remarks(sheet.cautions, paper), paper),
    section('What to expect of the unit', unitPart(sheet, paper), paper),
    changing.length === 0
      ? section('Settings', '  nothing changes', paper)
      : section(
          'Settings to dial, loop by loop in this order',
          changing.map((loop, at) => loopPart(loop, at + 1, sheet, paper)).join('\n\n'),
          paper,
        ),
    unchangedPart(sheet, paper),
    sheet.assumed.length === 0 ? null : section('Assumed', remarks(sheet.assumed, paper), paper),
    section('Documents', documents(sheet, paper), paper),
  ]);
}

function heading({ change, unitName }: SheetDocument, paper: Paper): string {
  const { paint } = paper;
  const state = {
    proposed: paint.warn('PROPOSED, NOT APPROVED'),
    approved: paint.good('APPROVED'),
    rejected: paint.bad('REJECTED'),
  }[change.state];
  return [
    paint.strong(unitName),
    `Change sheet ${change.id}: alternative ${change.alternative} of job ${change.job}`,
    state,
    signatures(change, paper),
  ].join('\n');
}

function signatures({ state, proposed, decided }: ChangeRecord, paper: Paper): string {
  const signed = ({ person, reason, at }: ChangeRecord['proposed']): string =>
    `by ${person}, ${at}: ${reason}`;
  const list: [string, string][] = [['proposed', signed(proposed)]];
  if (decided !== null) list.push([state, signed(decided)]);
  return facts(list, paper);
}

function unitPart(sheet: SheetDocument, paper: Paper): string {
  const { models, failures, confidence } = sheet.verified;
  const scale = sheet.reference === 'present' ? "today's settings" : sheet.reference;
  const speed =
    scale === 'none' ? 'A speed is a plain sum.' : `A speed of 1.00 is as fast as ${scale}.`;
  const verified =
    models <= 1
      ? 'The unit was taken as exact.'
      : `${models - failures} of ${models} models that the search never saw are within every limit; ` +
        `with 95 % confidence at least ${Math.floor(1000 * confidence) / 10} % of all models like these.`;
  const words = `${speed} ${todayWords(sheet)}${verified}`;
  return `${expectationsTable(sheet.objectives, sheet, paper)}\n${faintProse(words, paper)}`;
}

function todayWords({ today }: SheetDocument): string {
  if (today === null) return 'Not every closed loop has settings today. ';
  if (!today.stable) return "Today's settings are unstable. ";
  if (today.unstableModels === 0) return '';
  return `Today's settings are unstable on ${counted(today.unstableModels, 'model')}. `;
}

function faintProse(text: string, paper: Paper): string {
  const lines = wrapped(text, Math.max(30, paper.width - 2));
  return paper.paint.faint(indented(lines.join('\n')));
}

function loopPart(loop: SheetLoop, place: number, sheet: SheetDocument, paper: Paper): string {
  const { paint } = paper;
  const parts = [
    `  ${paint.strong(`${place}  ${loop.tag}`)}  ${loop.measurement} to ${loop.drives}`,
    faintProse(loop.controller, paper),
    settingsTable(loop.settings, paper),
    expectationsTable(loop.expectations, sheet, paper),
    loop.notes.length === 0 ? '' : remarks(loop.notes, paper),
    '  dialled by ______________________________  date and time ____________________',
  ];
  return parts.filter((part) => part !== '').join('\n');
}

function settingsTable(settings: readonly SheetSetting[], paper: Paper): string {
  const columns: readonly Column[] = [
    { head: 'setting' },
    { head: 'unit' },
    { head: 'old', lean: 'right' },
    { head: 'new', lean: 'right' },
    { head: '' },
  ];
  const rows = settings.map((setting) => [
    setting.name,
    setting.unit,
    setting.old === null ? noFigure : inFull(setting.old),
    paper.paint.strong(inFull(setting.new)),
    paper.paint.faint(setting.effect),
  ]);
  return grid(columns, rows, paper);
}

/** A number to dial with all its digits: rounded it would not be the one that was verified. */
const inFull = (value: number): string => significant(value, 12);

/** Figures today and after, with the worst over the models where it is another. */
function expectationsTable(
  expectations: readonly Expectation[],
  sheet: SheetDocument,
  paper: Paper,
): string {
  const stable = sheet.today?.stable ?? false;
  const robust = stable && sheet.today?.unstableModels === 0;
  const isExact = sheet.verified.models <= 1 && expectations.every(isOneModel);
  const columns: readonly Column[] = isExact
    ? [{ head: '' }, { head: '' }, lean('today'), lean('after')]
    : [{ head: '' }, { head: '' }, lean('today'), lean('worst'), lean('after'), lean('worst')];
  const rows = expectations.map((line) => {
    const show = (value: number | null, isStable: boolean): string =>
      value === null && isStable ? endless(line, sheet) : shown(line, value);
    const row = [line.figure, line.unit];
    if (isExact) row.push(show(line.todayWorst, robust), show(line.expectedWorst, true));
    else {
      row.push(show(line.today, stable), show(line.todayWorst, robust));
      row.push(show(line.expected, true), show(line.expectedWorst, true));
    }
    return row;
  });
  return grid(columns, rows, paper);
}

/** Ratios keep their decimals, so that 1.00 is seen to be one. */
const ratios: ReadonlySet<string> = new Set(['speed', 'robustness', 'peakSensitivity']);

const shown = ({ key }: Expectation, value: number | null): string =>
  ratios.has(key) ? fixed(value, 2) : figure(value);

const lean = (head: string): Column => ({ head, lean: 'right' });

const isOneModel = (line: Expectation): boolean =>
  (line.today === null || line.today === line.todayWorst) &&
  (line.expected === null || line.expected === line.expectedWorst);

/** What stands for a figure that a stable unit does not have. */
function endless({ key }: Expectation, { horizon }: SheetDocument): string {
  if (key === 'settlingTime') return `> ${significant(horizon)}`;
  return key === 'gainMargin' || key === 'phaseMargin' ? 'inf' : noFigure;
}

function unchangedPart({ loops }: SheetDocument, paper: Paper): string | null {
  const unchanged = loops.filter(({ changes }) => !changes);
  if (unchanged.length === 0) return null;
  const words = { retune: 'stays as it is', keep: 'kept', manual: 'stays in manual' } as const;
  const list = unchanged.map(({ tag, task }): [string, string] => [tag, words[task]]);
  return section('Unchanged', facts(list, paper), paper);
}

function documents({ change, compute, hash }: SheetDocument, paper: Paper): string {
  return facts(
    [
      ['job', change.jobHash],
      ['front', change.frontHash],
      [change.alternative, change.detailHash],
      ['calculation', compute],
      ['sheet', hash],
    ],
    paper,
  );
}
