import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError, LimitError } from '../../src/errors/errors.ts';
import { countContexts, HIGHEST_COUNTED_ORDER } from '../../src/models/context-counts.ts';
import { countingBlocks } from '../../src/models/context-counts-blocks.ts';
import { type CountedOrder, countDense } from '../../src/models/context-counts-dense.ts';
import { countingMemoryBytes } from '../../src/models/context-counts-memory.ts';
import { rankSymbols } from '../../src/models/context-counts-ranks.ts';
import { countSorted, sortWindows } from '../../src/models/context-counts-sorted.ts';
import { type Tallies, talliesOf } from '../../src/models/context-counts-tallies.ts';
import { newSymbolArray, oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { bruteCounts } from './context-counts-brute.ts';

const asList = (tallies: Tallies): number[] =>
  [...tallies.values].flatMap((value, i) => new Array<number>(tallies.times[i]).fill(value));

const scope = fc.constantFrom('message' as const, 'running' as const);

/** Sequences over alphabets small and huge, with few or many distinct symbols, cut anywhere, empty messages included. */
const sequence = fc
  .record({
    alphabetSize: fc.constantFrom(1, 2, 3, 256, 65536, 0x110000, 2 ** 32),
    distinct: fc.constantFrom(1, 2, 3, 40),
    draws: fc.array(fc.nat(), { maxLength: 120 }),
    cuts: fc.array(fc.nat(), { maxLength: 12 }),
    places: fc.array(fc.nat(), { minLength: 40, maxLength: 40 }),
  })
  .map(({ alphabetSize, distinct, draws, cuts, places }): SymbolSequence => {
    const symbols = newSymbolArray(alphabetSize, draws.length);
    draws.forEach((draw, i) => {
      const place = places[draw % distinct];
      symbols[i] = Math.floor((place / 2 ** 31) * alphabetSize);
    });
    const ends = cuts.map((cut) => cut % (draws.length + 1)).sort((a, b) => a - b);
    return { alphabetSize, symbols, messageEnds: Uint32Array.from([...ends, draws.length]) };
  });

function expectCounted(
  counted: CountedOrder,
  input: SymbolSequence,
  order: number,
  contexts: 'message' | 'running',
  blocks: number,
): void {
  const brute = bruteCounts(input, order, contexts, blocks);
  expect(asList(counted.contextTallies)).toEqual(brute.contextCounts);
  expect(asList(counted.pairTallies)).toEqual(brute.pairCounts);
  expect(counted.pairTallies.total).toBe(brute.positions);
  // Tables hold code lengths in single precision: 2^−24 of each.
  brute.blockBits.forEach((bits, b) => {
    expect(Math.abs(counted.blockBits[b] - bits)).toBeLessThanOrEqual(1e-6 * (1 + bits));
  });
}

describe('countContexts', () => {
  it('counts as a plain map does, in messages and over their ends', () => {
    fc.assert(
      fc.property(sequence, scope, fc.integer({ min: 0, max: 7 }), (input, contexts, upto) => {
        const orders = countContexts(input, { upto, contexts, blocks: 5 });
        expect(orders.map((o) => o.order)).toEqual(Array.from({ length: upto + 1 }, (_, k) => k));
        for (const counts of orders) {
          expectCounted(counts, input, counts.order, contexts, 5);
          const brute = bruteCounts(input, counts.order, contexts, 5);
          expect(counts.positions).toBe(brute.positions);
          expect(counts.contexts).toBe(brute.contextCounts.length);
          expect(counts.pairs).toBe(brute.pairCounts.length);
          expect([...counts.blockPositions]).toEqual(brute.blockPositions);
        }
      }),
    );
  });

  it('counts the same by table and by sorting', () => {
    fc.assert(
      fc.property(sequence, scope, fc.integer({ min: 0, max: 3 }), (input, contexts, upto) => {
        const ends =
          contexts === 'message' ? input.messageEnds : Uint32Array.of(input.symbols.length);
        const ranked = rankSymbols(input.symbols);
        const blocks = countingBlocks(input.symbols.length, 5);
        const windows = sortWindows(ranked, ends, upto + 1, blocks);
        for (let order = 0; order <= upto; order++) {
          expectCounted(countSorted(windows, order, blocks), input, order, contexts, 5);
          if (ranked.distinct ** (order + 1) <= 1 << 16) {
            expectCounted(countDense(ranked, ends, order, blocks), input, order, contexts, 5);
          }
        }
      }),
    );
  });

  it('tells apart more than 65 536 symbols', () => {
    const distinct = 70_000;
    const symbols = Uint32Array.from({ length: 2 * distinct }, (_, i) =>
      i < distinct ? 15 * i : 15 * ((7 * i) % distinct),
    );
    const input = oneMessage(symbols, 0x110000);
    for (const counts of countContexts(input, { upto: 2, contexts: 'running' })) {
      expectCounted(counts, input, counts.order, 'running', 64);
    }
  });

  it('counts a long run of one symbol as one context', () => {
    const input = oneMessage(new Uint8Array(100_000), 1);
    const orders = countContexts(input, { upto: HIGHEST_COUNTED_ORDER, contexts: 'message' });
    orders.forEach(({ positions, contexts, pairs }, k) => {
      expect({ positions, contexts, pairs }).toEqual({
        positions: 100_000 - k,
        contexts: 1,
        pairs: 1,
      });
    });
  });

  it('finds nothing in an empty sequence, with or without empty messages', () => {
    for (const messageEnds of [Uint32Array.of(), Uint32Array.of(0), Uint32Array.of(0, 0)]) {
      const input = { alphabetSize: 256, symbols: new Uint8Array(0), messageEnds };
      for (const contexts of ['message', 'running'] as const) {
        for (const counts of countContexts(input, { upto: 3, contexts })) {
          expect([counts.positions, counts.contexts, counts.pairs]).toEqual([0, 0, 0]);
        }
      }
    }
  });

  it('counts nothing at orders that messages are too short for', () => {
    const input = {
      alphabetSize: 256,
      symbols: Uint8Array.of(9, 9, 9, 9, 9),
      messageEnds: Uint32Array.of(1, 3, 5),
    };
    const positions = countContexts(input, { upto: 3, contexts: 'message' }).map(
      (counts) => counts.positions,
    );
    expect(positions).toEqual([5, 2, 0, 0]);
  });

  it('refuses orders and blocks out of range', () => {
    const input = oneMessage(new Uint8Array(3), 2);
    for (const upto of [-1, 1.5, HIGHEST_COUNTED_ORDER + 1, Number.NaN]) {
      expect(() => countContexts(input, { upto, contexts: 'message' })).toThrow(InputError);
    }
    for (const blocks of [0, 257]) {
      expect(() => countContexts(input, { upto: 1, contexts: 'message', blocks })).toThrow(
        InputError,
      );
    }
  });

  it('says after each order how far it is', () => {
    const steps: [number, number][] = [];
    countContexts(oneMessage(new Uint8Array(3), 2), {
      upto: 2,
      contexts: 'running',
      progress: (done, total) => steps.push([done, total]),
    });
    expect(steps).toEqual([
      [1, 3],
      [2, 3],
      [3, 3],
    ]);
  });
});

describe('the memory guard', () => {
  // 60 000 bytes of all values: orders 0 and 1 fit a table of 65 536 cells, order 2 is sorted.
  const symbols = Uint8Array.from({ length: 60_000 }, (_, i) => (i * i + (i >> 8)) % 256);
  const input = oneMessage(symbols, 256);
  const distinct = rankSymbols(symbols).distinct;
  const task = { symbolCount: symbols.length, symbolBytes: 1, distinct, memoryBytes: 0 };

  it('lets pass what needs exactly the limit and refuses one byte less', () => {
    const needed = countingMemoryBytes({ ...task, upto: 4 });
    const ask = (memoryBytes: number) =>
      countContexts(input, { upto: 4, contexts: 'running', memoryBytes });
    expect(ask(needed + 1)).toHaveLength(5);
    expect(ask(needed)).toHaveLength(5);
    expect(() => ask(needed - 1)).toThrow(LimitError);
  });

  it('names a part that fits, the largest such', () => {
    const memoryBytes = 500_000;
    let advice = '';
    try {
      countContexts(input, { upto: 4, contexts: 'running', memoryBytes });
    } catch (error) {
      advice = (error as LimitError).where.advice!;
    }
    const part = Number(/at most (\d+) symbols/.exec(advice)![1]);
    const needed = (symbolCount: number) => countingMemoryBytes({ ...task, symbolCount, upto: 4 });
    expect(needed(part)).toBeLessThanOrEqual(memoryBytes);
    expect(needed(part + 1)).toBeGreaterThan(memoryBytes);
    const order = Number(/orders up to (\d+) only/.exec(advice)![1]);
    expect(countingMemoryBytes({ ...task, upto: order })).toBeLessThanOrEqual(memoryBytes);
    expect(countingMemoryBytes({ ...task, upto: order + 1 })).toBeGreaterThan(memoryBytes);
  });

  it('counts orders up to 2 of 200 MB, and order 4 of 8 MiB, far below 1 GB, and refuses order 4 of 200 MB', () => {
    const large = { symbolBytes: 1, distinct: 256, memoryBytes: 0 };
    expect(countingMemoryBytes({ ...large, symbolCount: 200_000_000, upto: 2 })).toBeLessThan(3e8);
    expect(countingMemoryBytes({ ...large, symbolCount: 2 ** 23, upto: 4 })).toBeLessThan(2e8);
    expect(countingMemoryBytes({ ...large, symbolCount: 2e8, upto: 4 })).toBeGreaterThan(1e9);
  });
});

describe('talliesOf', () => {
  it('keeps the counts, small and large, in rising order', () => {
    fc.assert(
      fc.property(
        fc.array(fc.oneof(fc.integer({ min: 1, max: 9 }), fc.integer({ min: 4090, max: 2 ** 31 }))),
        (counts) => {
          const tallies = talliesOf([0, ...counts]);
          expect(asList(tallies)).toEqual([...counts].sort((a, b) => a - b));
          expect(tallies.distinct).toBe(counts.length);
          expect(tallies.total).toBe(counts.reduce((a, b) => a + b, 0));
        },
      ),
    );
  });
});
