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

/** The responses of a unit as a graph of points. */
export class ResponseGraph {
  private readonly leaving = new Map<Point, Link[]>();
  private readonly arriving = new Map<Point, Link[]>();

  constructor(readonly links: readonly Link[]) {
    for (const link of links) {
      append(this.leaving, pointOf(link.value.from), link);
      append(this.arriving, pointOfTag(link.value.to), link);
    }
  }

  from(point: Point): readonly Link[] {
    return this.leaving.get(point) ?? [];
  }

  to(point: Point): readonly Link[] {
    return this.arriving.get(point) ?? [];
  }

  /** The responses that lie on some way from any of the starts to the goal. */
  between(starts: readonly Point[], goal: Point): readonly Link[] {
    const ahead = this.reached(starts, (point) =>
      this.from(point).map((l) => pointOfTag(l.value.to)),
    );
    const behind = this.reached([goal], (point) =>
      this.to(point).map((l) => pointOf(l.value.from)),
    );
    return this.links.filter(
      ({ value }) => ahead.has(pointOf(value.from)) && behind.has(pointOfTag(value.to)),
    );
  }

  /** The responses of the only way from start to goal; undefined where there is none or several. */
  onlyWay(start: Point, goal: Point): readonly Link[] | undefined {
    const on = this.between([start], goal);
    const way: Link[] = [];
    for (let point = start; point !== goal; ) {
      const steps = on.filter((link) => pointOf(link.value.from) === point);
      const [step] = steps;
      if (step === undefined || steps.length > 1 || way.includes(step)) return undefined;
      way.push(step);
      point = pointOfTag(step.value.to);
    }
    return way;
  }

  private reached(starts: readonly Point[], next: (point: Point) => Point[]): ReadonlySet<Point> {
    const seen = new Set(starts);
    for (const point of seen) for (const other of next(point)) seen.add(other);
    return seen;
  }
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
