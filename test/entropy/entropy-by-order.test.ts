import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { InputError, LimitError } from '../../src/errors/errors.ts';
import { newSymbolArray, oneMessage, type SymbolSequence } from '../../src/symbols/sequence.ts';
import { bruteCounts } from '../models/context-counts-brute.ts';
import { addOneCoder } from './stand-in-coder.ts';

const ordersOf = (sequence: SymbolSequence, upto: number, contexts: 'message' | 'running') =>
  entropyByOrder(sequence, { upto, contexts }).orders;

describe('entropyByOrder', () => {
  it('is the entropy of the counts, with its correction, in an interval within 0 … log2 m', () => {
    const sequence = fc.record({
      alphabetSize: fc.constantFrom(1, 2, 7, 256, 65536),
      draws: fc.array(fc.nat(), { maxLength: 150 }),
      cuts: fc.array(fc.nat(150), { maxLength: 5 }),
      contexts: fc.constantFrom('message' as const, 'running' as const),
    });
    fc.assert(
      fc.property(sequence, ({ alphabetSize, draws, cuts, contexts }) => {
        const symbols = newSymbolArray(alphabetSize, draws.length);
        draws.forEach((draw, i) => {
          symbols[i] = draw % alphabetSize;
        });
        const ends = cuts.map((cut) => Math.min(cut, draws.length)).sort((a, b) => a - b);
        const input = {
          alphabetSize,
          symbols,
          messageEnds: Uint32Array.from([...ends, draws.length]),
        };
        for (const order of ordersOf(input, 4, contexts)) {
          const brute = bruteCounts(input, order.k, contexts, 1);
          const { positions } = brute;
          const plugIn = positions === 0 ? 0 : brute.blockBits[0] / positions;
          const free = brute.pairCounts.length - brute.contextCounts.length;
          expect(order.plugIn).toBeCloseTo(plugIn, 9);
          expect(order.corrected).toBeCloseTo(
            plugIn + (positions === 0 ? 0 : free / (2 * positions * Math.log(2))),
            9,
          );
          expect(order.low).toBeGreaterThanOrEqual(0);
          expect(order.low).toBeLessThanOrEqual(order.high);
          expect(order.high).toBeLessThanOrEqual(Math.log2(alphabetSize));
        }
      }),
    );
  });

  it('knows constant data exactly, from 20 symbols on', () => {
    for (const alphabetSize of [1, 2, 256]) {
      const result = entropyByOrder(oneMessage(new Uint8Array(100), alphabetSize), {
        upto: 3,
        contexts: 'running',
      });
      expect(result.largestEstimable).toBe(3);
      for (const { plugIn, corrected, low, high } of result.orders) {
        expect({ plugIn, corrected, low }).toEqual({ plugIn: 0, corrected: 0, low: 0 });
        // What another symbol may still hide behind; nothing where there is none.
        expect(high > 0).toBe(alphabetSize > 1);
      }
    }
  });

  it('knows that an alternating sequence has 1 bit at order 0 and none above', () => {
    const symbols = Uint8Array.from({ length: 6400 }, (_, i) => i % 2);
    const [zero, one, two] = ordersOf(oneMessage(symbols, 2), 2, 'running');
    expect(zero.plugIn).toBe(1);
    expect(one.plugIn).toBe(0);
    expect(one.corrected).toBe(0);
    expect(one.estimable && two.estimable).toBe(true);
  });

  it('says nothing of an empty sequence, of one symbol, or where all symbols differ', () => {
    const empty = entropyByOrder(oneMessage(new Uint8Array(0), 256), {
      upto: 2,
      contexts: 'message',
    });
    expect(empty.largestEstimable).toBe(-1);
    expect(empty.symbolCount).toBe(0);
    expect(empty.orders.every((o) => o.positions === 0 && o.low === 0 && o.high === 8)).toBe(true);
    const one = ordersOf(oneMessage(Uint8Array.of(5), 256), 1, 'message');
    expect(one.map((o) => [o.positions, o.estimable, o.low, o.high])).toEqual([
      [1, false, 0, 8],
      [0, false, 0, 8],
    ]);
    const distinct = ordersOf(
      oneMessage(
        Uint8Array.from({ length: 256 }, (_, i) => i),
        256,
      ),
      1,
      'running',
    );
    expect(distinct[0].plugIn).toBeCloseTo(8, 12);
    expect(distinct[0].estimable).toBe(false);
    expect(distinct[1].plugIn).toBe(0);
    expect(distinct[1].estimable).toBe(false);
  });

  it('has no positions at orders that every message is too short for', () => {
    const input = {
      alphabetSize: 2,
      symbols: new Uint8Array(300),
      messageEnds: Uint32Array.from({ length: 100 }, (_, i) => 3 * (i + 1)),
    };
    const orders = ordersOf(input, 4, 'message');
    expect(orders.map((o) => o.positions)).toEqual([300, 200, 100, 0, 0]);
    expect(orders.map((o) => o.estimable)).toEqual([true, true, true, false, false]);
    expect(orders[3].estimableReason).toBe('no position has that many predecessors');
  });

  it('tests what is useful only when asked', () => {
    const input = oneMessage(
      Uint8Array.from({ length: 2000 }, (_, i) => i % 2),
      2,
    );
    const common = { upto: 1, contexts: 'running', coderOf: addOneCoder } as const;
    const steps: string[] = [];
    const without = entropyByOrder(input, common).orders;
    expect(without.map((o) => o.useful)).toEqual([undefined, undefined]);
    expect(without[0].usefulReason).toBe('not tested: not asked for');
    const withTest = entropyByOrder(input, {
      ...common,
      useful: true,
      progress: (step, done, total) => steps.push(`${step} ${done}/${total}`),
    }).orders;
    expect(withTest.map((o) => o.useful)).toEqual([false, true]);
    expect(steps).toEqual(['count 1/2', 'count 2/2', 'useful 1/2', 'useful 2/2']);
  });

  it('passes on limits', () => {
    const input = oneMessage(new Uint8Array(1000), 2);
    expect(() => entropyByOrder(input, { upto: 99, contexts: 'message' })).toThrow(InputError);
    expect(() => entropyByOrder(input, { upto: 1, contexts: 'message', memoryBytes: 999 })).toThrow(
      LimitError,
    );
  });
});
