import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { chaoShen, chaoShenBlockBits } from '../../src/entropy/chao-shen.ts';
import { entropyByOrder } from '../../src/entropy/entropy-by-order.ts';
import { grassberger, grassbergerBlockBits } from '../../src/entropy/grassberger.ts';
import { nsb, nsbEntropyBits } from '../../src/entropy/nsb.ts';
import { BugError, InputError } from '../../src/errors/errors.ts';
import { countContexts } from '../../src/models/context-counts.ts';
import { talliesOf } from '../../src/models/context-counts-tallies.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { oneMessage } from '../../src/symbols/sequence.ts';

const countLists = fc.array(fc.integer({ min: 1, max: 60 }), { minLength: 1, maxLength: 12 });
const totalOf = (counts: readonly number[]): number => counts.reduce((a, b) => a + b, 0);

describe('Grassberger', () => {
  it('is the recurrence of the 2003 paper', () => {
    // G(1) = −γ − ln 2, G(2) = 2 − γ − ln 2, G(2k + 1) = G(2k), G(2k + 2) = G(2k) + 2 ÷ (2k + 1).
    const g = [Number.NaN, -0.577_215_664_901_532_9 - Math.LN2];
    g[2] = 2 + g[1];
    for (let n = 3; n <= 60; n++) g[n] = n % 2 === 1 ? g[n - 1] : g[n - 2] + 2 / (n - 1);
    fc.assert(
      fc.property(countLists, (counts) => {
        const total = totalOf(counts);
        const nats = Math.log(total) - totalOf(counts.map((n) => n * g[n])) / total;
        expect(grassbergerBlockBits(talliesOf(counts))).toBeCloseTo(nats / Math.LN2, 10);
      }),
    );
  });
});

describe('Chao–Shen', () => {
  it('is the formula of the 2003 paper, term by term', () => {
    fc.assert(
      fc.property(countLists, (counts) => {
        const n = totalOf(counts);
        const ones = counts.filter((count) => count === 1).length;
        const coverage = 1 - (ones === n ? n - 1 : ones) / n;
        let bits = 0;
        for (const count of counts) {
          const p = (coverage * count) / n;
          bits -= (p * Math.log2(p)) / (1 - (1 - p) ** n);
        }
        expect(chaoShenBlockBits(talliesOf(counts))).toBeCloseTo(bits, 8);
      }),
    );
  });
});

describe('at higher orders both', () => {
  it('are the difference of block entropies over the same positions', () => {
    const text = fc.array(fc.nat(2), { minLength: 4, maxLength: 60 });
    fc.assert(
      fc.property(text, (symbols) => {
        const counts = countContexts(oneMessage(Uint8Array.from(symbols), 3), {
          upto: 2,
          contexts: 'running',
        });
        for (const k of [1, 2]) {
          const tally = (length: number) => {
            const seen = new Map<string, number>();
            for (let i = 0; i + k < symbols.length; i++) {
              const block = symbols.slice(i, i + length).join();
              seen.set(block, (seen.get(block) ?? 0) + 1);
            }
            return talliesOf(seen.values());
          };
          for (const [estimator, ofBlocks] of [
            [grassberger, grassbergerBlockBits],
            [chaoShen, chaoShenBlockBits],
          ] as const) {
            const difference = ofBlocks(tally(k + 1)) - ofBlocks(tally(k));
            expect(estimator.estimate(counts[k])).toBeCloseTo(Math.max(0, difference), 10);
          }
        }
      }),
    );
  });

  it('come near the rate of a fair chain that is seen often, as the corrected figure does', () => {
    const generator = new SeededGenerator(3);
    let state = 0;
    // Stays with 0.9: rate h(0.1).
    const symbols = Uint8Array.from({ length: 20_000 }, () => {
      if (generator.real() < 0.1) state = 1 - state;
      return state;
    });
    const rate = -0.1 * Math.log2(0.1) - 0.9 * Math.log2(0.9);
    const { orders } = entropyByOrder(oneMessage(symbols, 2), {
      upto: 3,
      contexts: 'running',
      all: true,
    });
    for (const order of orders.slice(1)) {
      // Four standard errors of the mean of −log2 p over 20 000 symbols: each has spread 0.95 bit.
      expect(Math.abs(order.estimates!.grassberger - rate)).toBeLessThan(0.027);
      expect(Math.abs(order.estimates!.chaoShen - rate)).toBeLessThan(0.027);
      expect(order.estimates!.nsb).toBeUndefined();
    }
  });
});

describe('NSB', () => {
  it('is 0 for a single cell, and where nothing was seen', () => {
    expect(nsbEntropyBits(talliesOf([7]), 1)).toBe(0);
    expect(nsbEntropyBits(talliesOf([]), 256)).toBe(0);
  });

  it('comes near the entropy of what is seen often, with any number of cells from those seen on', () => {
    // With n much larger than the number of cells all estimators agree: plug-in and half a cell each, over n.
    const counts = [40_000, 30_000, 20_000, 10_000];
    const plugIn = -totalOf(counts.map((c) => (c / 1e5) * Math.log2(c / 1e5)));
    for (const cells of [4, 5, 16]) {
      expect(Math.abs(nsbEntropyBits(talliesOf(counts), cells) - plugIn)).toBeLessThan(16 / 1e5);
    }
    expect(nsbEntropyBits(talliesOf(new Array(256).fill(1000)), 256)).toBeCloseTo(8, 3);
  });

  it('stays finite and in range for few and many samples of few and many cells', () => {
    const cells = fc.oneof(
      fc.constantFrom(2, 256, 65_536, 256 ** 8, 2 ** 256),
      fc.integer({ min: 12, max: 99 }),
    );
    fc.assert(
      fc.property(countLists, cells, (counts, many) => {
        const room = Math.max(many, counts.length);
        const bits = nsbEntropyBits(talliesOf(counts), room);
        expect(bits).toBeGreaterThanOrEqual(0);
        expect(bits).toBeLessThanOrEqual(Math.log2(room));
      }),
    );
  });

  it('finds a peak far narrower than the step of its search', () => {
    // A million cells seen twice each: nearly uniform, and the weight over ln β is about 0.001 wide.
    const tallies = {
      values: Uint32Array.of(2),
      times: Uint32Array.of(1e6),
      distinct: 1e6,
      total: 2e6,
    };
    expect(nsbEntropyBits(tallies, 1e6)).toBeGreaterThan(Math.log2(1e6) - 0.5);
    expect(nsbEntropyBits(tallies, 1e6)).toBeLessThanOrEqual(Math.log2(1e6));
  });

  it('is stated for symbols without context only', () => {
    const [, first] = countContexts(oneMessage(Uint8Array.of(0, 1, 0), 2), {
      upto: 1,
      contexts: 'running',
    });
    expect(() => nsb(2).estimate(first)).toThrow(BugError);
  });

  it('refuses fewer cells than were seen', () => {
    for (const cells of [2, 0, Number.NaN, Number.POSITIVE_INFINITY]) {
      expect(() => nsbEntropyBits(talliesOf([1, 2, 3]), cells)).toThrow(InputError);
    }
  });
});

describe('the further estimates of degenerate input', () => {
  const estimatesOf = (symbols: Uint8Array | Uint16Array | Uint32Array, alphabetSize: number) =>
    entropyByOrder(oneMessage(symbols, alphabetSize), {
      upto: 2,
      contexts: 'message',
      all: true,
    }).orders.map((order) => order.estimates!);

  it.each([
    ['nothing', new Uint8Array(0), 256],
    ['one symbol', Uint8Array.of(3), 256],
    ['an alphabet of 1', new Uint8Array(50), 1],
    ['all equal', new Uint8Array(500).fill(9), 256],
    ['all different', Uint16Array.from({ length: 500 }, (_, i) => i), 65_536],
    ['fewer symbols than the order', Uint8Array.of(1, 2), 256],
    ['32-bit symbols', Uint32Array.of(2 ** 32 - 1, 5, 5, 2 ** 32 - 1), 2 ** 32],
  ] as const)('are finite and not negative: %s', (_, symbols, alphabetSize) => {
    for (const estimates of estimatesOf(symbols, alphabetSize)) {
      for (const value of Object.values(estimates)) {
        expect(value).toBeGreaterThanOrEqual(0);
        expect(value).toBeLessThan(Number.POSITIVE_INFINITY);
      }
    }
  });

  it('are 0 for constant data at order 1 and above, and by NSB for an alphabet of 1', () => {
    const [, first, second] = estimatesOf(new Uint8Array(500).fill(9), 256);
    expect([first, second]).toEqual([
      { grassberger: 0, chaoShen: 0 },
      { grassberger: 0, chaoShen: 0 },
    ]);
    expect(estimatesOf(new Uint8Array(50), 1)[0].nsb).toBe(0);
  });
});
