import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { dominates, hypervolume, nonDominated, selectEvenly } from '../../src/search/index.js';

const coordinate = fc.integer({ min: 0, max: 6 });
const pairs = fc.array(fc.tuple(coordinate, coordinate), { maxLength: 25 });
const triples = fc.array(fc.tuple(coordinate, coordinate, coordinate), { maxLength: 12 });

describe('the front', () => {
  it('keeps the first of equal points and the rest in order', () => {
    const points = [
      [3, 1],
      [1, 3],
      [2, 2],
      [2, 2],
      [3, 3],
      [1, 4],
    ];
    expect(nonDominated(points)).toEqual([0, 1, 2]);
    expect(nonDominated([])).toEqual([]);
  });

  it('leaves out points with a number that is not finite', () => {
    expect(
      nonDominated([
        [Number.NaN, 0],
        [1, 1],
        [0, Number.POSITIVE_INFINITY],
      ]),
    ).toEqual([1]);
  });

  it('holds exactly the points no other dominates', () => {
    fc.assert(
      fc.property(fc.oneof(pairs, triples), (points) => {
        const kept = nonDominated(points);
        const expected = points.flatMap((point, index) =>
          points.some((other) => dominates(other, point)) ||
          points.slice(0, index).some((other) => other.every((value, i) => value === point[i]))
            ? []
            : [index],
        );
        expect(kept).toEqual(expected);
      }),
    );
  });

  it('is picked evenly by arc length, its ends kept', () => {
    // Twenty-one points on a straight front, crowded at one end.
    const points = Array.from({ length: 21 }, (_, i) => [(i / 20) ** 2, 1 - (i / 20) ** 2]);
    const chosen = selectEvenly(points, 5);
    // The nearest to 0, 1/4, 1/2, 3/4 and 1 of the way.
    expect(chosen).toEqual([0, 10, 14, 17, 20]);
  });

  it('is picked without repetition and with the ends of every objective', () => {
    fc.assert(
      fc.property(fc.oneof(pairs, triples), fc.integer({ min: 1, max: 12 }), (drawn, count) => {
        const points = nonDominated(drawn).map((index) => drawn[index] as number[]);
        const chosen = selectEvenly(points, count);
        expect(new Set(chosen).size).toBe(Math.min(count, points.length));
        const axes = points[0]?.length ?? 0;
        if (count < axes || points.length === 0) return;
        for (let axis = 0; axis < axes; axis += 1) {
          const least = Math.min(...points.map((point) => point[axis] as number));
          expect(chosen.some((index) => points[index]?.[axis] === least)).toBe(true);
        }
      }),
    );
  });
});

describe('the hypervolume', () => {
  it('is the area of a staircase worked by hand', () => {
    // 1 x 3 left of 2, 1 x 2 left of 3, 1 x 1 left of 4 under the reference (4, 4).
    expect(
      hypervolume(
        [
          [1, 3],
          [2, 2],
          [3, 1],
        ],
        [4, 4],
      ),
    ).toBe(6);
    expect(
      hypervolume(
        [
          [1, 3],
          [2, 3],
          [5, 0],
        ],
        [4, 4],
      ),
    ).toBe(3);
    expect(hypervolume([], [4, 4])).toBe(0);
  });

  it('is the volume of boxes worked by hand', () => {
    // Two boxes of 1 x 2 x 2 and 2 x 2 x 1 meet in 1 x 2 x 1.
    expect(
      hypervolume(
        [
          [1, 0, 0],
          [0, 0, 1],
        ],
        [2, 2, 2],
      ),
    ).toBe(6);
    expect(hypervolume([[0, 0, 0]], [2, 3, 4])).toBe(24);
  });

  it('counts the unit cells dominated', () => {
    fc.assert(
      fc.property(fc.oneof(pairs, triples), (points) => {
        const size = points[0]?.length ?? 2;
        const reference = new Array<number>(size).fill(5);
        let cells = 0;
        for (let code = 0; code < 5 ** size; code += 1) {
          const corner = reference.map((_, i) => Math.floor(code / 5 ** i) % 5);
          if (points.some((p) => p.every((value, i) => value <= (corner[i] as number)))) cells += 1;
        }
        expect(hypervolume(points, reference)).toBe(cells);
      }),
    );
  });

  it('refuses objectives it cannot measure', () => {
    expect(() => hypervolume([[1, 1, 1, 1]], [2, 2, 2, 2])).toThrow('4 objectives');
    expect(() => hypervolume([[1, 1]], [2, 2, 2])).toThrow('3 objectives');
  });
});
