import type { Draft, Entry } from './draft.js';
import type { Findings } from './findings.js';
import { type LoopsByTag, loopsByTag, startsOf } from './loop-paths.js';
import type { LoopAsWritten } from './loops.js';
import { integratorsOf, isZero, sizeKey } from './model-facts.js';
import { type Link, movingLinks, pointOfTag, ResponseGraph } from './response-graph.js';
import { ringsOf } from './rings.js';

type LoopEntry = Entry<LoopAsWritten>;

const isClosed = (loop: LoopEntry): boolean =>
  loop.value.task !== 'manual' && !loop.lost.has('task');

/** Loops control what exists, through what exists, each by itself, and the cascades have an order. */
export function checkLoops(draft: Draft, findings: Findings): void {
  const loops = loopsByTag(draft);
  for (const loop of draft.loops.entries) checkEnds(loop, draft, loops, findings);
  checkShared(draft, findings);
  checkCascadeRings(loops, findings);
  checkOwnResponses(draft, loops, findings);
  const tasks = draft.loops.entries.map(({ value, lost }) => (lost.has('task') ? '' : value.task));
  if (
    draft.loops.complete &&
    tasks.length > 0 &&
    tasks.every((t) => t === 'keep' || t === 'manual')
  ) {
    findings.fault('NOTHING_TO_RETUNE', ['loops'], 'no loop has the task retune', 'at least one');
  }
}

function checkEnds(loop: LoopEntry, draft: Draft, loops: LoopsByTag, findings: Findings): void {
  const { path, value } = loop;
  const { drives } = value;
  const { tags } = draft;
  if (!tags.measurements.has(value.measurement)) {
    const place = [...path, 'measurement'];
    const allowed = 'the tag of a measurement';
    findings.fault('REFERENCE_UNKNOWN', place, 'no measurement has this tag', allowed);
  }
  if (typeof drives === 'string') {
    if (tags.actuators.has(drives)) return;
    const problem = 'no actuator has this tag';
    const allowed = 'the tag of an actuator, or { "loop": loop tag }';
    findings.fault('REFERENCE_UNKNOWN', [...path, 'drives'], problem, allowed);
  } else if (!tags.loops.has(drives.loop)) {
    const allowed = 'the tag of another loop';
    findings.fault(
      'REFERENCE_UNKNOWN',
      [...path, 'drives', 'loop'],
      'no loop has this tag',
      allowed,
    );
  } else {
    checkInner(loop, loops.get(drives.loop), findings);
  }
}

function checkInner(loop: LoopEntry, inner: LoopEntry | undefined, findings: Findings): void {
  if (inner === undefined || inner.lost.has('task')) return;
  if (isClosed(loop) && inner.value.task === 'manual') {
    const problem = `the loop it drives, ${inner.value.tag}, is in manual, so it cannot act`;
    findings.fault('CASCADE_BROKEN', [...loop.path, 'task'], problem, 'manual for this loop too');
  } else if (isClosed(loop) && isDeaf(inner.value)) {
    const problem = `nothing in this controller answers its setpoint, which ${loop.value.tag} drives`;
    const place = [...inner.path, 'controller', 'setpointWeight'];
    findings.fault('RESPONSE_MISSING', place, problem, 'more than 0, or integral action');
  }
  if (loop.value.loadStep !== undefined && loop.value.loadStep !== 0) {
    const problem = 'a loop that drives another has no load upset of its own; the step is not run';
    findings.warning([...loop.path, 'loadStep'], problem);
  }
}

/** Whether a controller goes by its measurement alone, whatever its setpoint. */
function isDeaf({ controller }: LoopAsWritten): boolean {
  const { terms, setpointWeight, derivativeOn } = controller;
  const kicks = terms.includes('D') && derivativeOn === 'error';
  return setpointWeight === 0 && !terms.includes('I') && !kicks;
}

/** Of the closed loops, no two share an actuator, an inner loop or a measurement. */
function checkShared(draft: Draft, findings: Findings): void {
  const drivenBy = new Map<string, string>();
  const controlledBy = new Map<string, string>();
  for (const loop of draft.loops.entries.filter(isClosed)) {
    const { tag, drives, measurement } = loop.value;
    const driven = typeof drives === 'string' ? drives : `loop ${drives.loop}`;
    const other = drivenBy.get(driven);
    if (other === undefined) drivenBy.set(driven, tag);
    else {
      const problem = `${driven} is driven by ${other} already`;
      findings.fault('DRIVEN_TWICE', [...loop.path, 'drives'], problem, 'one closed loop for each');
    }
    const controller = controlledBy.get(measurement);
    if (controller === undefined) controlledBy.set(measurement, tag);
    else {
      const problem = `${measurement} is controlled by ${controller} already`;
      const place = [...loop.path, 'measurement'];
      findings.fault('CONTROLLED_TWICE', place, problem, 'one closed loop for each measurement');
    }
  }
}

function checkCascadeRings(loops: LoopsByTag, findings: Findings): void {
  const next = (tag: string): string[] => {
    const drives = loops.get(tag)?.value.drives;
    return drives === undefined || typeof drives === 'string' ? [] : [drives.loop];
  };
  for (const ring of ringsOf(loops.keys(), next)) {
    const last = loops.get(ring.at(-1) ?? '');
    if (last === undefined) continue;
    const problem = `the cascade is a ring: ${[...ring, ring[0]].join(' -> ')}`;
    const allowed = 'a cascade that ends at an actuator';
    findings.fault('CASCADE_RING', [...last.path, 'drives', 'loop'], problem, allowed);
  }
}

/** A closed loop's output reaches its measurement, and a PD controller's by way of an integrator. */
function checkOwnResponses(draft: Draft, loops: LoopsByTag, findings: Findings): void {
  if (!draft.responses.complete || !draft.loops.complete) return;
  const lists = [
    draft.responses,
    ...draft.points.map((p) => p.responses).filter((r) => r.complete),
  ];
  for (const list of lists) {
    const graph = new ResponseGraph(list.entries);
    const moving = new ResponseGraph(movingLinks(list.entries));
    for (const loop of draft.loops.entries.filter(isClosed)) {
      if (!isResolved(loop.value, draft, loops)) continue;
      const starts = startsOf(loop.value, loops);
      const goal = pointOfTag(loop.value.measurement);
      const own = moving.between(starts, goal);
      if (own.length > 0) checkProportional(loop, own, findings);
      else checkUnmoved(loop, graph.between(starts, goal), list === draft.responses, findings);
    }
  }
}

/** Whether everything the loop names is there, so that a missing response is the fault to report. */
function isResolved(loop: LoopAsWritten, draft: Draft, loops: LoopsByTag): boolean {
  if (!draft.tags.measurements.has(loop.measurement)) return false;
  if (typeof loop.drives === 'string') return draft.tags.actuators.has(loop.drives);
  return loops.has(loop.drives.loop) && loop.drives.loop !== loop.tag;
}

function checkUnmoved(
  loop: LoopEntry,
  still: readonly Link[],
  nominal: boolean,
  findings: Findings,
): void {
  const zero = still.find((link) => isZero(link.value.model));
  if (zero !== undefined) {
    const { model } = zero.value;
    if (model.kind === 'transfer-function') return;
    const place = [...zero.path, 'model', sizeKey(model)];
    const problem = `this is how ${loop.value.tag} moves its own measurement, and it does not`;
    findings.fault('RESPONSE_ZERO', place, problem, 'a number other than 0');
  } else if (nominal) {
    const { measurement, drives } = loop.value;
    const output = typeof drives === 'string' ? drives : `loop ${drives.loop}`;
    const problem = `no response leads from ${output} to ${measurement}`;
    findings.fault('RESPONSE_MISSING', loop.path, problem, 'a response, or a chain of responses');
  }
}

function checkProportional(loop: LoopEntry, own: readonly Link[], findings: Findings): void {
  if (loop.value.controller.terms !== 'PD') return;
  if (own.some((link) => integratorsOf(link.value.model) > 0)) return;
  const place = [...loop.path, 'controller', 'terms'];
  const problem = 'PD holds a constant error unless the process itself integrates';
  findings.fault('TERMS_UNSUITED', place, problem, 'P, PI or PID');
}
