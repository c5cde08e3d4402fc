import type { Draft, Entry } from './draft.js';
import type { LoopAsWritten } from './loops.js';
import { directionOf } from './model-facts.js';
import { type Point, pointOfSetpoint, pointOfTag, type ResponseGraph } from './response-graph.js';

/** The readable loops of a document, by tag. */
export type LoopsByTag = ReadonlyMap<string, Entry<LoopAsWritten>>;

export function loopsByTag(draft: Draft): LoopsByTag {
  return new Map(draft.loops.entries.map((entry) => [entry.value.tag, entry]));
}

/** The loop and those inside it, outermost first; a ring ends where it would repeat. */
function cascadeFrom(loop: LoopAsWritten, loops: LoopsByTag): readonly LoopAsWritten[] {
  const cascade: LoopAsWritten[] = [];
  for (let at: LoopAsWritten | undefined = loop; at !== undefined && !cascade.includes(at); ) {
    cascade.push(at);
    at = typeof at.drives === 'string' ? undefined : loops.get(at.drives.loop)?.value;
  }
  return cascade;
}

/**
 * The points at which a loop's output enters the unit: its actuator; or the setpoint and the
 * measurement of each loop inside it, and the innermost loop's actuator.
 */
export function startsOf(loop: LoopAsWritten, loops: LoopsByTag): readonly Point[] {
  const cascade = cascadeFrom(loop, loops);
  return cascade.flatMap(({ drives }) => {
    if (typeof drives === 'string') return [pointOfTag(drives)];
    const inner = loops.get(drives.loop)?.value;
    const setpoint = pointOfSetpoint(drives.loop);
    return inner === undefined ? [setpoint] : [setpoint, pointOfTag(inner.measurement)];
  });
}

/**
 * The direction in which a rising output moves the loop's measurement, for an outer loop with its
 * inner loops following; undefined where the responses do not tell.
 */
export function processDirection(
  loop: LoopAsWritten,
  loops: LoopsByTag,
  graph: ResponseGraph,
): number | undefined {
  const goal = pointOfTag(loop.measurement);
  const { drives } = loop;
  if (typeof drives === 'string') return wayDirection(graph, pointOfTag(drives), goal);
  const inner = loops.get(drives.loop)?.value;
  if (inner === undefined) return undefined;
  const followed = pointOfTag(inner.measurement);
  const direct = [pointOfSetpoint(drives.loop), followed]
    .filter((start) => graph.between([start], goal).length > 0)
    .map((start) => wayDirection(graph, start, goal));
  const actuator = cascadeFrom(loop, loops).at(-1)?.drives;
  if (direct.length === 0 && typeof actuator === 'string') {
    const outer = wayDirection(graph, pointOfTag(actuator), goal);
    const own = wayDirection(graph, pointOfTag(actuator), followed);
    return outer === undefined || own === undefined ? undefined : outer * own;
  }
  return direct.every((direction) => direction === direct[0]) ? direct[0] : undefined;
}

function wayDirection(graph: ResponseGraph, start: Point, goal: Point): number | undefined {
  const way = graph.onlyWay(start, goal);
  if (way === undefined || way.length === 0) return undefined;
  let direction = 1;
  for (const link of way) {
    const step = directionOf(link.value.model);
    if (step === undefined) return undefined;
    direction *= step;
  }
  return direction;
}
