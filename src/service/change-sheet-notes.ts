import type { JobDocument, LoopDocument, ScoredSettings } from '../contract/index.js';

/** What to mind while one loop is changed; short sentences. */
export function loopNotes(
  loop: LoopDocument,
  job: JobDocument,
  today: ScoredSettings | null,
  expected: ScoredSettings,
): string[] {
  return [...bringingIn(loop), ...openedLoops(loop, job), ...manualNotes(loop, today, expected)];
}

function bringingIn({ tag, present }: LoopDocument): string[] {
  if (present !== undefined) return [];
  return [
    `${tag} stands in manual today and is put into automatic by this change; the way back is manual.`,
  ];
}

/** Loops that drive this one, near and far: they act on nothing while it is in manual. */
function openedLoops({ tag }: LoopDocument, { loops }: JobDocument): string[] {
  const opened: string[] = [];
  const opensBy = (inner: string): void => {
    for (const outer of loops) {
      const drivesInner = typeof outer.drives !== 'string' && outer.drives.loop === inner;
      if (!drivesInner || outer.task === 'manual') continue;
      opened.push(outer.tag);
      opensBy(outer.tag);
    }
  };
  opensBy(tag);
  if (opened.length === 0) return [];
  return [`With ${tag} in manual ${opened.join(', ')} cannot act either.`];
}

function manualNotes(
  { tag }: LoopDocument,
  today: ScoredSettings | null,
  expected: ScoredSettings,
): string[] {
  const rests = [
    today?.nominal.loops[tag]?.stableInManual === false ? "today's" : '',
    expected.nominal.loops[tag]?.stableInManual === false ? 'the new' : '',
  ].filter((words) => words !== '');
  if (rests.length === 0) return [];
  const words = `must not be left in manual: without it the unit is unstable with ${rests.join(' and with ')} settings of the other loops.`;
  return [`${tag} ${words}`];
}
