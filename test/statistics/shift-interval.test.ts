import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { shiftInterval } from '../../src/statistics/shift-interval.ts';

/** All differences, sorted. */
function differences(below: readonly number[], above: readonly number[]): number[] {
  return below.flatMap((a) => above.map((b) => b - a)).sort((x, y) => x - y);
}

/** So many values below and above, all of whose differences differ: the place of an end among them can be told. */
function samples(n: number, m: number): [number[], number[]] {
  return [Array.from({ length: n }, (_, i) => -i), Array.from({ length: m }, (_, j) => j * n)];
}

/** Differences left out at each end of the interval. */
function leftOut(n: number, m: number, level: number): [number, number] {
  const [below, above] = samples(n, m);
  const { low, high } = shiftInterval(below, above, level);
  const all = differences(below, above);
  return [all.indexOf(low), all.length - 1 - all.indexOf(high)];
}

/**
 * Critical values U of the two-sided rank-sum test, the largest U at which it still rejects: D. Auble, "Extended tables for
 * the Mann–Whitney statistic", 1953, as reprinted in statistics textbooks (from memory). The interval leaves out as many
 * differences at each end as U says.
 */
const CRITICAL: readonly (readonly [n: number, m: number, five: number, one: number])[] = [
  [5, 5, 2, 0],
  [6, 6, 5, 2],
  [8, 8, 13, 7],
  [10, 10, 23, 16],
  [10, 20, 55, 42],
  [15, 15, 64, 51],
  [20, 20, 127, 105],
];

describe('the interval of a shift', () => {
  test.each(CRITICAL)(
    'of %i and %i values leaves out %i differences at level 0.95, %i at 0.99',
    (n, m, five, one) => {
      expect(leftOut(n, m, 0.95)).toEqual([five, five]);
      expect(leftOut(n, m, 0.99)).toEqual([one, one]);
    },
  );

  test('counts orders as an enumeration of all of them does', () => {
    const subsets = (n: number, size: number): number[][] =>
      size === 0
        ? [[]]
        : n < size
          ? []
          : [...subsets(n - 1, size), ...subsets(n - 1, size - 1).map((s) => [...s, n - 1])];
    for (const [n, m] of [
      [1, 1],
      [1, 30],
      [2, 9],
      [4, 4],
      [4, 7],
      [6, 5],
    ]) {
      // For each way to place the first sample among all: pairs whose second value lies below the first.
      const counts = subsets(n + m, n).map((places) =>
        places.reduce((sum, place, i) => sum + place - i, 0),
      );
      for (const level of [0.6, 0.9, 0.95, 0.99]) {
        const share = (count: number) => counts.filter((u) => u < count).length / counts.length;
        let outside = 0;
        while (share(outside + 1) <= (1 - level) / 2 + 1e-12) outside++;
        const [below, above] = samples(n, m);
        const { low } = shiftInterval(below, above, level);
        const all = differences(below, above);
        expect(low, `${n} ${m} ${level}`).toBe(
          outside === 0 ? Number.NEGATIVE_INFINITY : all[outside - 1],
        );
      }
    }
  });

  test('by the normal law beyond 2500 pairs leaves out about as many as counting them would', () => {
    // 50 and 50 values are counted, 51 and 50 are not; from one to the next the number grows by nearly the same step.
    const counted = [48, 49, 50].map((n) => leftOut(n, 50, 0.99)[0]);
    const near = leftOut(51, 50, 0.99)[0];
    const step = counted[2] - counted[1];
    expect(Math.abs(near - (counted[2] + step))).toBeLessThanOrEqual(2);
  });

  test('is that of the list of all differences', () => {
    const value = fc.double({ min: -10, max: 10, noNaN: true });
    fc.assert(
      fc.property(
        fc.array(value, { minLength: 5, maxLength: 12 }),
        fc.array(value, { minLength: 5, maxLength: 12 }),
        (below, above) => {
          const all = differences(below, above);
          const { shift, low, high } = shiftInterval(below, above, 0.9);
          expect(shift).toBe((all[(all.length - 1) >> 1] + all[all.length >> 1]) / 2);
          const place = leftOut(below.length, above.length, 0.9)[0];
          expect(low).toBe(all[place]);
          expect(high).toBe(all[all.length - 1 - place]);
        },
      ),
    );
  });

  test('moves with a shift and turns with the samples', () => {
    const [a, b] = [
      [1, 4, 2, 8, 5, 7],
      [3, 6, 9, 11, 2, 14],
    ];
    const plain = shiftInterval(a, b, 0.95);
    const moved = shiftInterval(
      a,
      b.map((value) => value + 100),
      0.95,
    );
    expect(moved).toEqual({
      shift: plain.shift + 100,
      low: plain.low + 100,
      high: plain.high + 100,
    });
    expect(shiftInterval(b, a, 0.95)).toEqual({
      shift: -plain.shift,
      low: -plain.high,
      high: -plain.low,
    });
  });

  test('has no ends where there are too few values for the level', () => {
    // Of 4 and 4 values even the most extreme order comes up 2 times in 70.
    expect(shiftInterval([1, 2, 3, 4], [5, 6, 7, 8], 0.99)).toEqual({
      shift: 4,
      low: Number.NEGATIVE_INFINITY,
      high: Number.POSITIVE_INFINITY,
    });
    expect(shiftInterval([1], [3], 0.5)).toMatchObject({ shift: 2, low: Number.NEGATIVE_INFINITY });
  });

  test('holds the true shift as often as it says, whatever the law', () => {
    // 2000 trials, of a law without a variance: misses beyond 1 % + 3 standard deviations of a binomial.
    const generator = new SeededGenerator('shift');
    const draw = () => Math.tan(Math.PI * (generator.real() - 0.5));
    let misses = 0;
    for (let trial = 0; trial < 2000; trial++) {
      const below = Array.from({ length: 12 }, draw);
      const above = Array.from({ length: 9 }, () => draw() + 2);
      const { low, high } = shiftInterval(below, above, 0.99);
      if (low > 2 || high < 2) misses++;
    }
    expect(misses / 2000).toBeLessThanOrEqual(0.01 + 3 * Math.sqrt((0.01 * 0.99) / 2000));
    expect(misses).toBeGreaterThan(0);
  });

  test.each([
    [[], [1], 0.9],
    [[1], [], 0.9],
    [[1], [1], 0],
    [[1], [1], 1],
  ])('refuses %j, %j at %f', (below, above, level) => {
    expect(() => shiftInterval(below, above, level)).toThrow(InputError);
  });
});
