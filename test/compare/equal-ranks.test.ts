import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { equalRanks } from '../../src/compare/equal-ranks.ts';

/** Pairs that are apart, each as the better and the worse. */
const apartOf =
  (...pairs: [number, number][]) =>
  (leader: number, worse: number) =>
    pairs.some(([a, b]) => a === leader && b === worse);

describe('equalRanks', () => {
  it('ranks as in a race: 1, 1, 3', () => {
    expect([...equalRanks(0, () => true)]).toEqual([]);
    expect([...equalRanks(1, () => true)]).toEqual([1]);
    expect([...equalRanks(4, () => true)]).toEqual([1, 2, 3, 4]);
    expect([...equalRanks(4, () => false)]).toEqual([1, 1, 1, 1]);
    expect([...equalRanks(4, apartOf([0, 2], [1, 2], [0, 3], [1, 3]))]).toEqual([1, 1, 3, 3]);
  });

  it('follows the leader where being apart is not transitive', () => {
    // 0 is near 1, 1 near 2, 0 apart from 2: 2 leads the next rank, though nothing told it from 1.
    expect([...equalRanks(3, apartOf([0, 2]))]).toEqual([1, 1, 3]);
    // 0 and 1 are near, 0 and 2 are near, 1 and 2 are apart: both are near the best, and share its rank.
    expect([...equalRanks(3, apartOf([1, 2]))]).toEqual([1, 1, 1]);
    // 1 is apart from the best, the worse but more varying 2 is not, and 3 is apart from 0 alone.
    expect([...equalRanks(4, apartOf([0, 1], [0, 3]))]).toEqual([1, 3, 1, 3]);
    // A chain in which only neighbours are near.
    expect([...equalRanks(5, (a, b) => b - a > 1)]).toEqual([1, 1, 3, 3, 5]);
  });

  it('keeps its promises for every relation', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 9 }),
        fc.infiniteStream(fc.boolean()),
        (count, coin) => {
          const table = Array.from({ length: count * count }, () => coin.next().value);
          const apart = (a: number, b: number) => table[a * count + b];
          const ranks = [...equalRanks(count, apart)];
          expect(ranks[0]).toBe(1);
          for (const rank of new Set(ranks)) {
            const leader = ranks.indexOf(rank);
            // One more than how many stand before.
            expect(rank).toBe(1 + ranks.filter((other) => other < rank).length);
            ranks.forEach((own, i) => {
              if (i > leader && own === rank) expect(apart(leader, i)).toBe(false);
              if (own > rank) {
                expect(i).toBeGreaterThan(leader);
                expect(apart(leader, i)).toBe(true);
              }
            });
          }
        },
      ),
    );
  });
});
