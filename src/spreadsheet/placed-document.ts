import { pathText } from '../contract/index.js';
import type { FieldPath } from './layout/field.js';
import type { Place } from './place.js';

type Holder = Record<string | number, unknown>;

/** A job document in the making, and the cell that each of its places comes from. */
export class PlacedDocument {
  readonly root: Holder = {};
  private readonly places = new Map<string, Place>();

  /** Says which cell a place of the document belongs to, whether or not anything is in it. */
  mark(path: FieldPath, place: Place): void {
    const key = pathText(path);
    if (!this.places.has(key)) this.places.set(key, place);
  }

  /**
   * Puts a value at a place of the document.
   * @returns false where something else stands there, or in its way, already
   */
  put(path: FieldPath, value: unknown, place: Place): boolean {
    const holder = this.holderOf(path);
    const last = path.at(-1);
    if (holder === undefined || last === undefined || Object.hasOwn(holder, last)) return false;
    holder[last] = value;
    this.places.set(pathText(path), place);
    if (typeof last === 'number') this.mark(path.slice(0, -1), place);
    return true;
  }

  /** Puts an empty object or list at a place where nothing stands. */
  ensure(path: FieldPath, value: Holder | unknown[]): void {
    const holder = this.holderOf(path);
    const last = path.at(-1);
    if (holder !== undefined && last !== undefined && !Object.hasOwn(holder, last)) {
      holder[last] = value;
    }
  }

  /** What stands at a place. */
  at(path: FieldPath): unknown {
    let value: unknown = this.root;
    for (const step of path) {
      if (typeof value !== 'object' || value === null || !Object.hasOwn(value, step))
        return undefined;
      value = (value as Holder)[step];
    }
    return value;
  }

  /**
   * The cell of a place, by its path in words, or the nearest cell around it.
   * @returns `rest` is what of the path has no cell of its own
   */
  placeOf(path: string): { readonly place: Place; readonly rest: string } | undefined {
    for (let known = path; ; known = withoutLast(known)) {
      const place = this.places.get(known);
      if (place !== undefined) return { place, rest: path.slice(known.length) };
      if (known === '') return undefined;
    }
  }

  private holderOf(path: FieldPath): Holder | undefined {
    let holder = this.root;
    for (const [index, step] of path.slice(0, -1).entries()) {
      if (!Object.hasOwn(holder, step))
        holder[step] = typeof path[index + 1] === 'number' ? [] : {};
      const next = holder[step];
      if (typeof next !== 'object' || next === null) return undefined;
      holder = next as Holder;
    }
    return holder;
  }
}

/** `loops[2].scan` is in `loops[2]`, which is in `loops`. */
const withoutLast = (path: string): string => path.replace(/(?:^|\.)[^.[\]]+$|\[[^\]]*\]$/, '');
