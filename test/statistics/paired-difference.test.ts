import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { intoBlocks, pairedDifference } from '../../src/statistics/paired-difference.ts';
import { quantileOfSorted } from '../../src/statistics/quantiles.ts';
import { exhaustiveResamples } from './exhaustive-resamples.ts';

const numbers = (values: number[]) => Float64Array.from(values);

describe('pairedDifference', () => {
  it('brackets as all resamples of five units do', () => {
    const bitsA = numbers([100, 220, 310, 90, 160]);
    const bitsB = numbers([130, 215, 380, 88, 190]);
    const symbols = numbers([20, 50, 70, 20, 30]);
    const rates = Float64Array.from([...exhaustiveResamples(5)], (drawn) => {
      let bits = 0;
      let count = 0;
      drawn.forEach((times, i) => {
        bits += times * (bitsB[i] - bitsA[i]);
        count += times * symbols[i];
      });
      return bits / count;
    }).sort();
    const repetitions = 20_000;
    const found = pairedDifference({ bitsA, bitsB, symbols, seed: 5, repetitions });
    expect(found.difference).toBeCloseTo((30 - 5 + 70 - 2 + 30) / 190, 12);
    // A quantile of 20 000 resamples lies between the exact ones at its level ± 4 standard errors of that level.
    const slack = 4 * Math.sqrt((0.025 * 0.975) / repetitions);
    for (const [bound, level] of [
      [found.low, 0.025],
      [found.high, 0.975],
    ]) {
      expect(bound).toBeGreaterThanOrEqual(quantileOfSorted(rates, level - slack) - 1e-12);
      expect(bound).toBeLessThanOrEqual(quantileOfSorted(rates, level + slack) + 1e-12);
    }
    // Five units cannot decide: chance makes them agree in one case of sixteen.
    expect(found.decided).toBe(false);
  });

  const units = fc.array(
    fc.record({
      a: fc.integer({ min: 0, max: 10_000 }),
      b: fc.integer({ min: 0, max: 10_000 }),
      n: fc.integer({ min: 1, max: 100 }),
    }),
    { minLength: 1, maxLength: 30 },
  );

  it('turns its sign when A and B change places', () => {
    fc.assert(
      fc.property(units, (list) => {
        const a = numbers(list.map((u) => u.a));
        const b = numbers(list.map((u) => u.b));
        const common = { symbols: numbers(list.map((u) => u.n)), seed: 2, repetitions: 41 };
        const one = pairedDifference({ bitsA: a, bitsB: b, ...common });
        const other = pairedDifference({ bitsA: b, bitsB: a, ...common });
        expect(other.difference).toBe(-one.difference + 0 || 0);
        expect(other.low).toBeCloseTo(-one.high, 8);
        expect(other.high).toBeCloseTo(-one.low, 8);
        expect(other.decided).toBe(one.decided);
      }),
    );
  });

  it('has no width where every unit differs by the same rate, and decides from six units on', () => {
    for (const count of [1, 5, 6, 40]) {
      const symbols = numbers(Array.from({ length: count }, (_, i) => i + 1));
      const found = pairedDifference({
        bitsA: symbols.map((n) => 3 * n),
        bitsB: symbols.map((n) => 3.25 * n),
        symbols,
        seed: 1,
        repetitions: 100,
      });
      expect(found.difference).toBeCloseTo(0.25, 12);
      expect(found.low).toBeCloseTo(0.25, 12);
      expect(found.high).toBeCloseTo(0.25, 12);
      expect(found.units).toBe(count);
      expect(found.decided).toBe(count >= 6);
    }
  });

  it('does not decide between equals', () => {
    const bits = numbers([1, 2, 3, 4, 5, 6, 7, 8]);
    const found = pairedDifference({
      bitsA: bits,
      bitsB: bits,
      symbols: bits,
      seed: 1,
      repetitions: 50,
    });
    expect(found).toEqual({ difference: 0, low: 0, high: 0, units: 8, decided: false });
  });

  it('never divides by the symbols of empty units alone', () => {
    const found = pairedDifference({
      bitsA: numbers([1, 1, 1, 10]),
      bitsB: numbers([1, 1, 1, 12]),
      symbols: numbers([0, 0, 0, 4]),
      seed: 9,
      repetitions: 500,
    });
    expect(found.low).toBeCloseTo(0.5, 12);
    expect(found.high).toBeCloseTo(0.5, 12);
  });

  it('refuses no units, no symbols, unequal lengths and no resamples', () => {
    const one = numbers([1]);
    const none = numbers([]);
    const ask = (bitsA: Float64Array, bitsB: Float64Array, symbols: Float64Array, r = 10) =>
      pairedDifference({ bitsA, bitsB, symbols, seed: 1, repetitions: r });
    expect(() => ask(none, none, none)).toThrow(InputError);
    expect(() => ask(one, one, numbers([0]))).toThrow(InputError);
    expect(() => ask(one, none, one)).toThrow(InputError);
    expect(() => ask(one, one, numbers([1, 1]))).toThrow(InputError);
    expect(() => ask(one, one, one, 0)).toThrow(InputError);
  });
});

describe('intoBlocks', () => {
  it('sums neighbours, in order, into blocks of nearly one size', () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 0, max: 200 }),
        fc.integer({ min: 1, max: 300 }),
        (length, blocks) => {
          const sizes = intoBlocks(new Float64Array(length).fill(1), blocks);
          expect(sizes.length).toBe(Math.min(length, blocks));
          if (length > 0) expect(Math.max(...sizes) - Math.min(...sizes)).toBeLessThanOrEqual(1);
          const values = Float64Array.from({ length }, (_, i) => i * i);
          let from = 0;
          const expected = [...sizes].map((size) => {
            let sum = 0;
            for (const value of values.slice(from, from + size)) sum += value;
            from += size;
            return sum;
          });
          expect(from).toBe(length);
          expect([...intoBlocks(values, blocks)]).toEqual(expected);
        },
      ),
    );
  });

  it('refuses no blocks', () => {
    expect(() => intoBlocks(numbers([1]), 0)).toThrow(InputError);
  });
});
