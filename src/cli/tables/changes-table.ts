import { stripVTControlCharacters } from 'node:util';
import type { JobDocument, LoopDocument, SettingsDocument } from '../../contract/index.js';
import { fixed, significant } from './figures.js';
import { type Column, grid } from './grid.js';
import type { Paper } from './paper.js';
import { type SettingName, settingNames, settingUnits } from './setting-units.js';

/** A tuning set by the name it is shown under. */
export interface NamedSettings {
  readonly name: string;
  readonly settings: SettingsDocument;
}

/**
 * Today's settings of every loop that some tuning set changes, then what each set makes of them: the
 * new number and its ratio to today's, with today's before it where the paper is wide enough.
 */
export function changesTable(
  job: JobDocument,
  present: SettingsDocument,
  proposals: readonly NamedSettings[],
  paper: Paper,
): string {
  const changing = changingLoops(job, present, proposals);
  if (changing.length === 0) return '  nothing';
  const shown = settingNames.filter((name) =>
    [{ name: '', settings: present }, ...proposals].some(({ settings }) =>
      changing.some(({ tag }) => (settings[tag]?.[name] ?? 0) !== 0),
    ),
  );
  const view = { job, present, proposals, changing, shown };
  const wide = tableOf(view, true, paper);
  return widthOf(wide) <= paper.width ? wide : tableOf(view, false, paper);
}

/** Loops that any of the proposals changes. */
export function changingLoops(
  job: JobDocument,
  present: SettingsDocument,
  proposals: readonly NamedSettings[],
): readonly LoopDocument[] {
  return job.loops.filter(({ tag }) =>
    settingNames.some((name) => {
      const today = present[tag]?.[name] ?? 0;
      return proposals.some(({ settings }) => (settings[tag]?.[name] ?? 0) !== today);
    }),
  );
}

interface View {
  readonly job: JobDocument;
  readonly present: SettingsDocument;
  readonly proposals: readonly NamedSettings[];
  readonly changing: readonly LoopDocument[];
  readonly shown: readonly SettingName[];
}

/** @param withToday  repeats today's number before every new one */
function tableOf(view: View, withToday: boolean, paper: Paper): string {
  const { job, present, proposals, changing, shown } = view;
  const { paint } = paper;
  const columns: Column[] = [{ head: '' }, { head: 'loop' }];
  for (const name of shown) {
    if (withToday) columns.push({ head: '', lean: 'right' });
    columns.push({ head: name, lean: 'right' }, { head: '' });
  }
  const rows: string[][] = changing.map((loop, at) => {
    const units = settingUnits(job, loop);
    const cells = shown.flatMap((name) => {
      const value = present[loop.tag]?.[name];
      const pair = value === undefined ? ['', ''] : [number(value), paint.faint(units[name])];
      return withToday ? ['', ...pair] : pair;
    });
    return [at === 0 ? paint.strong('today') : '', loop.tag, ...cells];
  });
  for (const { name: title, settings } of proposals) {
    changing.forEach(({ tag }, at) => {
      const cells = shown.flatMap((name) =>
        changeCells(present[tag]?.[name], settings[tag]?.[name], withToday, paper),
      );
      rows.push([at === 0 ? paint.strong(title) : '', tag, ...cells]);
    });
  }
  return grid(columns, rows, paper);
}

function changeCells(
  before: number | undefined,
  after: number | undefined,
  withToday: boolean,
  { paint }: Paper,
): string[] {
  const today = withToday ? [before === undefined ? '' : paint.faint(`${number(before)} ->`)] : [];
  if (after === undefined) return [...today.map(() => ''), '', ''];
  const ratio = before === undefined || before === 0 ? '' : `x${fixed(after / before, 2)}`;
  return [...today, number(after), paint.faint(ratio)];
}

const number = (value: number): string => significant(value, 4);

const widthOf = (table: string): number =>
  Math.max(
    ...stripVTControlCharacters(table)
      .split('\n')
      .map((line) => line.length),
  );
