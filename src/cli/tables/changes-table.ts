import { stripVTControlCharacters } from 'node:util';
import {
  type JobDocument,
  type LoopDocument,
  type SettingName,
  type SettingsDocument,
  settingNames,
  settingUnits,
} from '../../contract/index.js';
import { figure, fixed, significant } from './figures.js';
import { grid } from './grid.js';
import type { Paper } from './paper.js';

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

/** One setting of one loop as shown: what comes before it, the number, and what is said of it. */
interface Cell {
  readonly before: string;
  readonly value: string;
  readonly behind: string;
}

/** @param withToday  repeats today's number before every new one */
function tableOf(view: View, withToday: boolean, paper: Paper): string {
  const { job, present, proposals, changing, shown } = view;
  const today = changing.map((loop) => {
    const units = settingUnits(job, loop);
    return shown.map((name): Cell => {
      const value = present[loop.tag]?.[name];
      const isSet = proposals.some(({ settings }) => settings[loop.tag]?.[name] !== undefined);
      if (value === undefined && !isSet) return empty;
      return { before: '', value: figure(value, 4), behind: units[name] };
    });
  });
  const proposed = proposals.map(({ settings }) =>
    changing.map(({ tag, controller }) =>
      shown.map((name) => {
        const inverse = name === 'gain' && controller.gainIn === 'proportional-band';
        return changed(present[tag]?.[name], settings[tag]?.[name], { withToday, inverse });
      }),
    ),
  );
  const all = [today, ...proposed];
  const lines = shown.map((name, at) => {
    const column = all.flat().map((cells) => cells[at] ?? empty);
    const before = Math.max(...column.map((cell) => cell.before.length));
    const value = Math.max(name.length - before, ...column.map((cell) => cell.value.length));
    return { name, before, value };
  });
  const titles = ['today', ...proposals.map(({ name }) => name)];
  const rows = all.flatMap((block, index) =>
    block.map((cells, at) => [
      at === 0 ? paper.paint.strong(titles[index] ?? '') : '',
      changing[at]?.tag ?? '',
      ...cells.map((cell, k) => aligned(cell, lines[k] as (typeof lines)[number], paper)),
    ]),
  );
  const columns = lines.map(({ name, before, value }) => ({ head: name.padStart(before + value) }));
  return grid([{ head: '' }, { head: 'loop' }, ...columns], rows, paper);
}

const empty: Cell = { before: '', value: '', behind: '' };

/** @param inverse  a proportional band: what is said of it is the ratio of the gain it stands for */
function changed(
  before: number | undefined,
  after: number | undefined,
  { withToday, inverse }: { readonly withToday: boolean; readonly inverse: boolean },
): Cell {
  if (after === undefined) return empty;
  const hasRatio = before !== undefined && before !== 0;
  const ratio = hasRatio ? (inverse ? before / after : after / before) : null;
  return {
    before: withToday && before !== undefined ? `${number(before)} -> ` : '',
    value: number(after),
    behind: ratio === null ? '' : `x${fixed(ratio, 2)}${inverse ? ' gain' : ''}`,
  };
}

/** Numbers below each other end in one column; what is said of them begins in one. */
function aligned(
  { before, value, behind }: Cell,
  room: { readonly before: number; readonly value: number },
  { paint }: Paper,
): string {
  const front = paint.faint(before.padStart(room.before));
  return `${front}${value.padStart(room.value)} ${paint.faint(behind)}`;
}

const number = (value: number): string => significant(value, 4);

const widthOf = (table: string): number =>
  Math.max(
    ...stripVTControlCharacters(table)
      .split('\n')
      .map((line) => line.length),
  );
