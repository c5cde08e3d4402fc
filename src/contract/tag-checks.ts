import type { Draft, Listed } from './draft.js';
import type { Findings, Path } from './findings.js';
import { mostOf } from './unit.js';

/** Tags are unique where responses and loops look them up, and there are not too many. */
export function checkTags(draft: Draft, findings: Findings): void {
  const instruments = [draft.measurements, draft.actuators, draft.disturbances];
  checkUnique(
    instruments,
    'the unit has a measurement, actuator or disturbance of this tag',
    findings,
  );
  checkUnique([draft.loops], 'another loop has this tag', findings);
  checkPointNames(draft, findings);
  const inputs = draft.actuators.entries.length + draft.disturbances.entries.length;
  if (inputs > mostOf.inputs) {
    findings.fault(
      'LIST_LENGTH',
      ['unit', 'disturbances'],
      `${inputs} actuators and disturbances together`,
      `at most ${mostOf.inputs} actuators and disturbances together`,
    );
  }
}

function checkUnique(
  lists: readonly Listed<{ readonly tag: string }>[],
  problem: string,
  findings: Findings,
): void {
  const seen = new Set<string>();
  for (const { path, value } of lists.flatMap((list) => list.entries)) {
    if (seen.has(value.tag)) {
      findings.fault('TAG_DUPLICATE', [...path, 'tag'], problem, 'each tag once');
    }
    seen.add(value.tag);
  }
}

function checkPointNames(draft: Draft, findings: Findings): void {
  const seen = new Set<unknown>();
  for (const { path, name } of draft.points) {
    if (typeof name !== 'string') continue;
    if (seen.has(name)) {
      const place: Path = [...path, 'name'];
      findings.fault(
        'TAG_DUPLICATE',
        place,
        'another operating point has this name',
        'each name once',
      );
    }
    seen.add(name);
  }
}
