import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { SymbolSums } from '../../src/models/symbol-sums.ts';

const alphabets = fc.constantFrom(1, 2, 3, 5, 255, 256, 257, 1000);

function checkAgainst(sums: SymbolSums, counts: number[], seen: boolean[]) {
  expect(sums.sum).toBe(counts.reduce((a, b) => a + b, 0));
  expect(sums.distinct).toBe(seen.filter(Boolean).length);
  let low = 0;
  let seenLow = 0;
  counts.forEach((count, symbol) => {
    expect(sums.sumBelow(symbol)).toBe(low);
    expect(sums.seenBelow(symbol)).toBe(seenLow);
    if (count > 0) {
      expect(sums.holding(low, 1, 0)).toBe(symbol);
      expect(sums.holding(low + count - 1, 1, 0)).toBe(symbol);
    }
    expect(sums.holding(2 * low + 3 * symbol, 2, 3)).toBe(symbol);
    expect(sums.holding(2 * (low + count) + 3 * symbol + 2, 2, 3)).toBe(symbol);
    if (!seen[symbol]) expect(sums.unseenAt(symbol - seenLow)).toBe(symbol);
    low += count;
    if (seen[symbol]) seenLow++;
  });
}

describe('SymbolSums against an array', () => {
  it('keeps sums and ranks through counting, halving, taking out, marking and restoring', () => {
    fc.assert(
      fc.property(
        alphabets,
        fc.constantFrom('up', 'down'),
        fc.array(fc.oneof(fc.nat(5), fc.nat(1000)), { maxLength: 60 }),
        fc.array(fc.oneof(fc.nat(5), fc.nat(1000)), { maxLength: 60 }),
        (m, halving, first, second) => {
          let sums = new SymbolSums(m, halving as 'up' | 'down');
          const counts = new Array<number>(m).fill(0);
          const seen = new Array<boolean>(m).fill(false);
          const halve = () => {
            sums.halve();
            counts.forEach((count, i) => {
              counts[i] = halving === 'up' ? Math.ceil(count / 2) : Math.floor(count / 2);
            });
          };
          const count = (list: number[]) => {
            list.forEach((value, i) => {
              const symbol = value % m;
              const below = counts.slice(0, symbol).reduce((a, b) => a + b, 0);
              expect(sums.increment(symbol)).toBe(below);
              counts[symbol]++;
              seen[symbol] = true;
              if (i % 20 === 19) halve();
            });
          };
          count(first);
          checkAgainst(sums, counts, seen);
          sums = sums.clone();
          sums.mark();
          const marked = [counts.slice(), seen.slice()] as const;
          count(second);
          checkAgainst(sums, counts, seen);
          if (first.length > 0) {
            const symbol = first[0] % m;
            sums.takeOut(symbol);
            checkAgainst(sums, counts.with(symbol, 0), seen);
            sums.putBack(symbol);
          }
          checkAgainst(sums, counts, seen);
          sums.restore();
          checkAgainst(sums, marked[0], marked[1]);
        },
      ),
      { numRuns: 60, seed: 61 },
    );
  });
});
