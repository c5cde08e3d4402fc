import type { Entry } from './draft.js';
import { isZero } from './model-facts.js';
import type { ResponseDocument, ResponseSource } from './responses.js';

/** A point that responses begin or end at: a tag, or the setpoint of a loop. */
export type Point = string;

/** The point of a measurement, actuator or disturbance. */
export const pointOfTag = (tag: string): Point => `tag ${tag}`;
/** The point of a loop's setpoint. */
export const pointOfSetpoint = (loop: string): Point => `setpoint ${loop}`;

const pointOf = (source: ResponseSource): Point =>
  typeof source === 'string' ? pointOfTag(source) : pointOfSetpoint(source.setpointOf);

/** A pair of points in words, as a name for the response between them. */
export function pairText(response: Pick<ResponseDocument, 'from' | 'to'>): string {
  const { from, to } = response;
  return `${typeof from === 'string' ? from : `setpoint of ${from.setpointOf}`} -> ${to}`;
}

export type Link = Entry<ResponseDocument>;

/** One response with the points it joins. */
interface Step {
  readonly link: Link;
  readonly start: Point;
  readonly end: Point;
}

/** The responses of a unit as a graph of points. */
export class ResponseGraph {
  private readonly steps: readonly Step[];
  private readonly ahead = new Map<Point, Point[]>();
  private readonly behind = new Map<Point, Point[]>();

  constructor(links: readonly Link[]) {
    this.steps = links.map((link) => {
      return { link, start: pointOf(link.value.from), end: pointOfTag(link.value.to) };
    });
    for (const { start, end } of this.steps) {
      append(this.ahead, start, end);
      append(this.behind, end, start);
    }
  }

  /** The responses that lie on some way from any of the starts to the goal. */
  between(starts: readonly Point[], goal: Point): readonly Link[] {
    return this.stepsBetween(starts, goal).map(({ link }) => link);
  }

  /** The responses of the only way from start to goal; undefined where there is none or several. */
  onlyWay(start: Point, goal: Point): readonly Link[] | undefined {
    const on = this.stepsBetween([start], goal);
    const way: Link[] = [];
    for (let point = start; point !== goal; ) {
      const steps = on.filter((step) => step.start === point);
      const [step] = steps;
      if (step === undefined || steps.length > 1 || way.includes(step.link)) return undefined;
      way.push(step.link);
      point = step.end;
    }
    return way;
  }

  private stepsBetween(starts: readonly Point[], goal: Point): readonly Step[] {
    const ahead = reached(starts, this.ahead);
    const behind = reached([goal], this.behind);
    return this.steps.filter(({ start, end }) => ahead.has(start) && behind.has(end));
  }
}

/** The starts and every point that steps lead to from them. */
function reached(
  starts: readonly Point[],
  next: ReadonlyMap<Point, readonly Point[]>,
): ReadonlySet<Point> {
  const seen = new Set(starts);
  for (const point of seen) for (const other of next.get(point) ?? []) seen.add(other);
  return seen;
}

/** Responses that move what they lead to. */
export function movingLinks(links: readonly Link[]): readonly Link[] {
  return links.filter((link) => !isZero(link.value.model));
}

function append<Value>(lists: Map<string, Value[]>, key: string, value: Value): void {
  const list = lists.get(key);
  if (list === undefined) lists.set(key, [value]);
  else list.push(value);
}
