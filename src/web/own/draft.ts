import {
  type LoopSettingsDocument,
  type SettingName,
  type SettingsDocument,
  settingNames,
} from '../../contract/index.js';
import type { UnitView } from '../text/unit-view.js';

/** Texts of one loop's fields, as somebody left them. */
type FieldTexts = Partial<Readonly<Record<SettingName, string>>>;

/** Settings that somebody is trying: what they started from, and what stands in the fields now. */
export interface Draft {
  /** The tuning set it was started from. */
  readonly base: string;
  readonly texts: Readonly<Record<string, FieldTexts>>;
}

/** A field of the draft: a setting of a loop. */
export interface FieldName {
  readonly loop: string;
  readonly setting: SettingName;
}

/** A fresh draft with the numbers of a tuning set. */
export function draftFrom(base: string, settings: SettingsDocument, unit: UnitView): Draft {
  const texts: Record<string, FieldTexts> = {};
  for (const { tag, dials } of tried(unit)) {
    const own = settings[tag];
    texts[tag] = Object.fromEntries(
      dials.map(({ setting }) => [setting, textOf(own?.[setting] ?? 0)]),
    );
  }
  return { base, texts };
}

/** Loops whose settings can be tried: a kept one keeps what it has, one in manual has none. */
export const tried = ({ loops }: UnitView): UnitView['loops'] =>
  loops.filter(({ task }) => task === 'retune');

export const withText = (draft: Draft, { loop, setting }: FieldName, text: string): Draft => ({
  ...draft,
  texts: { ...draft.texts, [loop]: { ...draft.texts[loop], [setting]: text } },
});

/** All digits that matter, with a plain sign: it is to be typed over. */
export const textOf = (value: number): string => String(Number(value.toPrecision(12)));

const numberShape = /^[-+]?(?:\d+\.?\d*|\.\d+)(?:e[-+]?\d+)?$/i;

/** The number that a field holds; null where it is none. */
export function numberIn(text: string): number | null {
  const plain = text.trim().replace('\u2212', '-');
  const value = numberShape.test(plain) ? Number(plain) : Number.NaN;
  return Number.isFinite(value) ? value : null;
}

/** The settings of a draft, and what is no number in it. */
export interface ReadDraft {
  readonly settings: SettingsDocument;
  readonly unread: readonly FieldName[];
}

/** An empty derivative or filter is none; an integral and a gain must be there. */
export function readDraft({ texts }: Draft): ReadDraft {
  const settings: SettingsDocument = {};
  const unread: FieldName[] = [];
  for (const [loop, fields] of Object.entries(texts)) {
    const own: Partial<Record<SettingName, number>> = {};
    for (const setting of settingNames) {
      const text = fields[setting];
      const mayLack = setting === 'derivative' || setting === 'filter';
      if (text === undefined || (mayLack && text.trim() === '')) continue;
      const value = numberIn(text);
      if (value === null) unread.push({ loop, setting });
      else if (!mayLack || value !== 0) own[setting] = value;
    }
    settings[loop] = own as LoopSettingsDocument;
  }
  return { settings, unread };
}

/** What a draft changes of the settings that it was started from. */
export const isTouched = (draft: Draft, fresh: Draft): boolean =>
  Object.entries(draft.texts).some(([loop, fields]) =>
    settingNames.some((setting) => {
      const [now, before] = [fields[setting], fresh.texts[loop]?.[setting]];
      return now !== before && (now === undefined || numberIn(now) !== numberIn(before ?? ''));
    }),
  );

/** One step of a field: what its controller can be dialled in, or a unit of the third digit. */
export function stepOf(value: number, dialStep: number | null): number {
  if (dialStep !== null) return dialStep;
  if (value === 0) return 0.01;
  const third = Math.floor(Math.log10(Math.abs(value)) + 1e-9) - 2;
  // Read rather than raised, for a power of ten is then the nearest number to it.
  return Number(`1e${third}`);
}

/**
 * The value so many steps on; it stays where it would lose its sign.
 * @param mayBeZero  a derivative or a filter can be off
 */
export function nudged(
  value: number,
  steps: number,
  dialStep: number | null,
  mayBeZero: boolean,
): number {
  const step = stepOf(value, dialStep);
  const raw = value + steps * step;
  const next = Number((Math.round(raw / step) * step).toPrecision(12));
  if (Math.sign(next) === Math.sign(value) || value === 0) {
    return next < 0 && mayBeZero ? 0 : next;
  }
  return mayBeZero ? 0 : value;
}
