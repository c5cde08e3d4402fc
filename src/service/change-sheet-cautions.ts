import type { ChangeRecord, JobDocument, SheetLoop } from '../contract/index.js';
import type { Proposed } from './proposed.js';

/** What to mind before, during and after a change; short sentences, what stops it first. */
export function cautionsOf(
  job: JobDocument,
  change: ChangeRecord,
  alternative: Proposed,
  loops: readonly SheetLoop[],
): string[] {
  return [
    ...stateWords(change),
    ...scope,
    ...basis(job, alternative),
    ...before(loops),
    ...during,
    ...wayBack(loops),
  ];
}

function stateWords({ state }: ChangeRecord): string[] {
  switch (state) {
    case 'proposed':
      return ['This change is proposed and not approved: dial nothing from this sheet.'];
    case 'rejected':
      return ['This change was rejected: dial nothing from this sheet.'];
    case 'approved':
      return [];
  }
}

const scope = [
  'Loops of safety instrumented functions (IEC 61511) are out of scope: change none of them by this sheet.',
  'Heddle proposes and people decide: it writes to no control system, and every number is dialled by a person.',
  "The site's management of change, local codes and licensed practice apply and come first.",
] as const;

function basis({ search, unit }: JobDocument, { verified }: Proposed): string[] {
  const sentences = [
    'What to expect is computed from the models of the job document; it is not measured on the unit.',
  ];
  if (search.models === 1) {
    const points = unit.operatingPoints.length > 0 ? ' at its operating points' : '';
    sentences.push(
      `The unit was taken as exact${points}: how these settings hold where it differs from its models was not looked at.`,
    );
  } else if (verified.failures > 0) {
    sentences.push(
      `Of ${verified.models} verification models, all stable, ${verified.failures} broke a limit.`,
    );
  }
  return sentences;
}

function before(loops: readonly SheetLoop[]): string[] {
  const sentences = [
    'Compare the settings found in each controller with the old ones here. Where they differ, stop: this sheet rests on other settings.',
    'Agree beforehand who watches and for how long after each loop, and what stops the change and brings the old settings back.',
  ];
  if (loops.some(({ task, changes }) => task !== 'manual' && !changes)) {
    sentences.push('Loops listed as unchanged must run as they do today for the figures to hold.');
  }
  return sentences;
}

const during = [
  'Change one loop at a time, in the order listed, inner loops before those that drive them; watch each before the next.',
  'This release does not check the states in between, some loops new and the others old: only the whole new set is verified.',
  'Where a controller takes new settings only in manual, put that loop in manual first; an inner loop in manual opens the loops that drive it.',
  'Return to automatic without a bump: the setpoint at the measured value, the output where it stands.',
] as const;

function wayBack(loops: readonly SheetLoop[]): string[] {
  const sentences = [
    'The way back is the old settings, dialled one loop at a time in the reverse order.',
  ];
  const broughtIn = loops.filter(({ settings }) => settings.some(({ old }) => old === null));
  if (broughtIn.length > 0) {
    const tags = broughtIn.map(({ tag }) => tag).join(', ');
    sentences.push(`There are no old settings for ${tags}: the way back is manual.`);
  }
  return sentences;
}
