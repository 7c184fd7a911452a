import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { blockEstimable, estimableOrders, judgeEstimable } from '../../src/entropy/estimable.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { newSymbolArray, oneMessage } from '../../src/symbols/sequence.ts';

const judge = (positions: number, contexts: number, pairs: number, entropyBits: number) =>
  judgeEstimable({ positions, contexts, pairs, entropyBits }).estimable;

describe('the rule for one order', () => {
  it('needs 20 positions for each context', () => {
    expect(judge(2000, 100, 100, 0)).toBe(true);
    expect(judge(1999, 100, 100, 0)).toBe(false);
    expect(judge(2001, 100, 100, 0)).toBe(true);
  });

  it('needs 20 positions for each free parameter', () => {
    expect(judge(2000, 1, 101, 8)).toBe(true);
    expect(judge(1999, 1, 101, 8)).toBe(false);
    expect(judge(2001, 1, 101, 8)).toBe(true);
  });

  it('allows a correction of 2 % of the entropy', () => {
    // (P − C) ÷ (2N ln 2) = 10 ÷ (2 · 1000 · ln 2) = 0.0072135 bits, which is 2 % of 0.360674.
    expect(judge(1000, 1, 11, 0.36068)).toBe(true);
    expect(judge(1000, 1, 11, 0.36067)).toBe(false);
  });

  it('holds for constant data from 20 positions on, and never without positions', () => {
    expect(judge(20, 1, 1, 0)).toBe(true);
    expect(judge(19, 1, 1, 0)).toBe(false);
    expect(judge(0, 0, 0, 0)).toBe(false);
  });

  it.each([
    [[0, 0, 0, 0], 'no position has that many predecessors'],
    [[1000, 100, 500, 2], '10 symbols for each context seen, 20 are needed'],
    [[1000, 10, 510, 4], '2.0 symbols for each free parameter, 20 are needed'],
    [[1000, 1, 11, 0.1], 'the bias correction is 7.2 % of the entropy, 2 % is allowed'],
    [[5000, 1, 2, 1], '5000 symbols for each context seen, a 0.014 % bias correction'],
    [[5000, 1, 1, 0], '5000 symbols for each context seen, no bias correction'],
  ])('%j: %s', ([positions, contexts, pairs, entropyBits], reason) => {
    expect(judgeEstimable({ positions, contexts, pairs, entropyBits }).reason).toBe(reason);
  });

  it('is the same for blocks: one context, distinct blocks for pairs', () => {
    const bits = fc.double({ min: 0, max: 9, noNaN: true });
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 10_000 }),
        fc.nat(600),
        bits,
        (blocks, more, entropy) => {
          const distinct = Math.min(blocks, 1 + more);
          const term = (distinct - 1) / (2 * blocks * Math.LN2);
          const expected = blocks >= 20 && blocks >= 20 * (distinct - 1) && term <= 0.02 * entropy;
          expect(blockEstimable(blocks, distinct, entropy)).toBe(expected);
        },
      ),
    );
    expect(blockEstimable(0, 0, 0)).toBe(false);
  });
});

describe('the rule for all orders', () => {
  it('refuses every order above one that fails', () => {
    const good = { positions: 1000, contexts: 1, pairs: 2, entropyBits: 1 };
    const bad = { positions: 1000, contexts: 100, pairs: 1000, entropyBits: 1 };
    const verdicts = estimableOrders([good, bad, good]);
    expect(verdicts.map((v) => v.estimable)).toEqual([true, false, false]);
    expect(verdicts[2].reason).toBe('order 1 is not estimable already');
    expect(estimableOrders([])).toEqual([]);
  });

  it('never holds for uniform noise where contexts outnumber a twentieth of the symbols', () => {
    const sizes = fc.constantFrom(2, 3, 16, 256, 65536);
    fc.assert(
      fc.property(sizes, fc.integer({ min: 1, max: 4000 }), fc.nat(), (m, length, seed) => {
        const generator = new SeededGenerator(seed);
        const symbols = newSymbolArray(m, length);
        for (let i = 0; i < length; i++) symbols[i] = generator.integer(0, m - 1);
        const { orders } = entropyByOrder(oneMessage(symbols, m), {
          upto: 14,
          contexts: 'running',
        });
        for (const { k, estimable } of orders) {
          // All m^(k+1) pairs are equally likely: with N of them at most and m ≥ 2, the rule needs m^k ≤ N ÷ 20 or so.
          if (m ** k > length / 10) expect(estimable, `order ${k}`).toBe(false);
        }
      }),
      { numRuns: 60 },
    );
  });
});
