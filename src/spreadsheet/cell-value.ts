import type { GridCell, SpreadsheetFaultCode } from '../contract/index.js';
import { bareWords, type Field } from './layout/field.js';

/** Why a cell cannot be what its heading asks for. */
export interface CellRefusal {
  readonly code: SpreadsheetFaultCode;
  readonly problem: string;
  readonly allowed: string;
}

/** What a cell says; `undefined` where it says nothing. */
export type CellReading =
  | { readonly ok: true; readonly value: unknown }
  | { readonly ok: false; readonly refusal: CellRefusal };

/** How cells that hold no plain value are marked in a grid. */
export const marks = { date: '#DATE ', merged: '#MERGED ' } as const;

const failed =
  /^#(REF!|VALUE!|DIV\/0!|NAME\?|N\/A|NUM!|NULL!|SPILL!|CALC!|FIELD!|BLOCKED!|CONNECT!|UNKNOWN!|BUSY!|PYTHON!|GETTING_DATA|EXTERNAL!)$/i;

/**
 * What a cell means under its heading. A leading apostrophe makes the rest a text as it stands.
 * @param cell  not empty
 */
export function readCell(cell: string | number, field: Field): CellReading {
  if (typeof cell === 'number') return readNumberCell(cell, field);
  const special = refuseSpecial(cell);
  if (special !== undefined) return { ok: false, refusal: special };
  const verbatim = cell.startsWith("'");
  const text = verbatim ? cell.slice(1) : cell.trim();
  switch (field.kind) {
    case 'text':
      return good(text);
    case 'choice':
      return good(field.choices?.find((one) => bareWords(one) === bareWords(text)) ?? text);
    case 'number':
      return readNumber(text.trim(), field);
    case 'yes-no':
      return readYesNo(text);
    case 'numbers':
      return readNumbers(text, field);
    case 'words':
      return good(text.split(/[;,]/).map((word) => word.trim().toLowerCase()));
  }
}

const good = (value: unknown): CellReading => ({ ok: true, value });

function bad(code: SpreadsheetFaultCode, problem: string, allowed: string): CellReading {
  return { ok: false, refusal: { code, problem, allowed } };
}

/** What no cell may hold, whatever its heading; undefined for everything else. */
export function refuseSpecial(cell: GridCell): CellRefusal | undefined {
  if (typeof cell !== 'string') return undefined;
  if (cell.startsWith('=')) {
    const problem = 'a formula that was saved without its value';
    const allowed = 'the value itself, or the file saved again by a program that calculates it';
    return { code: 'CELL_FORMULA', problem, allowed };
  }
  if (failed.test(cell)) {
    return { code: 'CELL_ERROR', problem: 'the formula of this cell failed', allowed: 'a value' };
  }
  if (cell.startsWith(marks.date)) {
    const allowed =
      'a number or a text; a tag that looks like a date needs its cell formatted as text';
    return { code: 'CELL_DATE', problem: 'the cell holds a date or time', allowed };
  }
  if (cell.startsWith(marks.merged)) {
    const problem = `the cell is merged with others, ${cell.slice(marks.merged.length)}`;
    return { code: 'CELL_MERGED', problem, allowed: 'each value in a cell of its own' };
  }
  return undefined;
}

/** The text as a cell that will be read as it stands. */
export function textCell(text: string): string {
  const mistaken = /^['=#]/.test(text) || text.trim() !== text;
  return mistaken ? `'${text}` : text;
}

function readNumberCell(value: number, field: Field): CellReading {
  switch (field.kind) {
    case 'number':
      return good(value);
    case 'numbers':
      return good([value]);
    case 'text':
    case 'choice':
    case 'words':
      return good(String(value));
    case 'yes-no':
      return readYesNo(String(value));
  }
}

const numberShape = /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i;
const commaShape = /^[+-]?\d[\d.' ]*,\d+(e[+-]?\d+)?$/i;

function readNumber(text: string, field: Field): CellReading {
  if (text.endsWith('%')) return readPercent(text, field);
  if (numberShape.test(text)) {
    const value = Number(text);
    if (Number.isFinite(value)) return good(value);
  }
  if (commaShape.test(text)) {
    const allowed = 'a number with a decimal point and nothing between thousands, as in 1234.5';
    return bad('CELL_COMMA', 'a number with a comma in it', allowed);
  }
  return bad('CELL_NUMBER', 'not a number', 'a number, without its unit, as in 12.5');
}

function readPercent(text: string, field: Field): CellReading {
  const number = text.slice(0, -1).trim();
  if (!numberShape.test(number)) {
    return bad('CELL_NUMBER', 'not a number', 'a number, without its unit, as in 12.5');
  }
  if (field.percent === 'share') return good(Number(number) / 100);
  if (field.percent === 'figure') return good(Number(number));
  const allowed = 'a number in the units of its heading, the cell not formatted as a percentage';
  return bad('CELL_PERCENT', 'a percentage has no meaning here', allowed);
}

function readYesNo(text: string): CellReading {
  const word = text.trim().toLowerCase();
  if (word === 'yes' || word === 'true') return good(true);
  if (word === 'no' || word === 'false') return good(false);
  return bad('CELL_YES_NO', 'neither yes nor no', 'yes, no');
}

function readNumbers(text: string, field: Field): CellReading {
  const parts = text.trim().split(/\s*;\s*|\s+/);
  const values: unknown[] = [];
  for (const part of parts) {
    const read = readNumber(part, field);
    if (!read.ok) {
      const allowed = 'numbers with semicolons or blanks between them, as in 12; 7; 1';
      return { ok: false, refusal: { ...read.refusal, allowed } };
    }
    values.push(read.value);
  }
  return good(values);
}
