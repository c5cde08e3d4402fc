import { stringify } from 'csv-stringify/sync';
import type { Expectation, SheetDocument, SheetLoop } from '../contract/index.js';

const columns = [
  'kind',
  'loop',
  'what',
  'unit',
  'today',
  'new',
  'today worst',
  'new worst',
  'words',
] as const;

type Row = Partial<Record<(typeof columns)[number], string | number | null>>;

/**
 * The sheet as one table for people and spreadsheets (RFC 4180, UTF-8 with its mark).
 *
 * `kind` says what a row is: what the sheet is about, an objective, a loop, one of its settings or
 * expectations, a note, an assumption, a caution, the hash of the whole. Numbers are written in full.
 * A text that a spreadsheet would take for a formula begins with an apostrophe.
 */
export function sheetCsv(sheet: SheetDocument): string {
  const rows = [
    ...about(sheet),
    ...sheet.objectives.map((objective) => expectationRow('objective', objective)),
    ...sheet.loops.flatMap(loopRows),
    ...sheet.assumed.map((words) => ({ kind: 'assumption', words })),
    ...sheet.cautions.map((words) => ({ kind: 'caution', words })),
    { kind: 'hash', what: 'SHA-256', words: sheet.hash },
  ];
  return stringify(rows, {
    columns: [...columns],
    header: true,
    bom: true,
    record_delimiter: 'windows',
    escape_formulas: true,
  });
}

function about({ change, verified, today, ...sheet }: SheetDocument): readonly Row[] {
  const { proposed, decided } = change;
  const rows: Row[] = [
    { what: 'unit', words: sheet.unitName },
    { what: 'change', words: change.id },
    { what: 'state', words: change.state },
    { what: 'proposed', words: `${proposed.person}, ${proposed.at}: ${proposed.reason}` },
  ];
  if (decided !== null) {
    const words = `${decided.person}, ${decided.at}: ${decided.reason}`;
    rows.push({ what: change.state, words });
  }
  rows.push(
    { what: 'job', words: change.job },
    { what: 'alternative', words: change.alternative },
    { what: 'job document', words: change.jobHash },
    { what: 'front', words: change.frontHash },
    { what: 'alternative document', words: change.detailHash },
    { what: 'compute version', words: sheet.compute },
    { what: 'horizon', unit: sheet.timeUnit, new: sheet.horizon },
    { what: 'speed 1 means', words: sheet.reference },
    { what: 'unstable models', today: today?.unstableModels ?? null },
    { what: 'models that judged', new: verified.models },
    { what: 'models outside a limit', new: verified.failures },
    { what: 'share within limits, 95 % confidence', new: verified.confidence },
  );
  return rows.map((row) => ({ kind: 'sheet', ...row }));
}

function loopRows(loop: SheetLoop): readonly Row[] {
  const { tag, settings, expectations, notes } = loop;
  return [
    { kind: 'loop', loop: tag, what: 'task', words: loop.task },
    { kind: 'loop', loop: tag, what: 'changes', words: loop.changes ? 'yes' : 'no' },
    { kind: 'loop', loop: tag, what: 'measurement', words: loop.measurement },
    { kind: 'loop', loop: tag, what: 'drives', words: loop.drives },
    { kind: 'loop', loop: tag, what: 'controller', words: loop.controller },
    { kind: 'loop', loop: tag, what: 'action', words: loop.action },
    ...settings.map(({ name, unit, old, new: next, effect }) => ({
      kind: 'setting',
      loop: tag,
      what: name,
      unit,
      today: old,
      new: next,
      words: effect,
    })),
    ...expectations.map((expectation) => expectationRow('expectation', expectation, tag)),
    ...notes.map((words) => ({ kind: 'note', loop: tag, words })),
  ];
}

function expectationRow(kind: string, expectation: Expectation, loop: string | null = null): Row {
  return {
    kind,
    loop,
    what: expectation.figure,
    unit: expectation.unit,
    today: expectation.today,
    new: expectation.expected,
    'today worst': expectation.todayWorst,
    'new worst': expectation.expectedWorst,
  };
}
