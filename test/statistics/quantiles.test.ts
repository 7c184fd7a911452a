import fc from 'fast-check';
import { median as referenceMedian, sampleStandardDeviation } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { bootstrapMean, percentileInterval } from '../../src/statistics/bootstrap.ts';
import { median, quantileOfSorted } from '../../src/statistics/quantiles.ts';
import { ratioStandardError } from '../../src/statistics/ratio-error.ts';

const values = fc.array(fc.double({ min: -1e6, max: 1e6, noNaN: true }), {
  minLength: 1,
  maxLength: 40,
});

describe('quantiles', () => {
  it('give the median of the reference library simple-statistics', () => {
    fc.assert(
      fc.property(values, (list) => {
        const before = [...list];
        expect(median(list)).toBeCloseTo(referenceMedian(list), 6);
        expect(list).toEqual(before);
      }),
    );
  });

  it('are linear between order statistics', () => {
    // By hand: (n − 1)·q = 4 · 0.3 = 1.2, so a fifth of the way from 20 to 30.
    expect(quantileOfSorted([10, 20, 30, 40, 50], 0.3)).toBeCloseTo(22, 12);
    expect(quantileOfSorted([10, 20, 30, 40, 50], 0)).toBe(10);
    expect(quantileOfSorted([10, 20, 30, 40, 50], 1)).toBe(50);
    expect(quantileOfSorted([4], 0.9)).toBe(4);
  });

  it('need values and a share', () => {
    expect(() => quantileOfSorted([], 0.5)).toThrow(InputError);
    expect(() => quantileOfSorted([1], 1.01)).toThrow(InputError);
    expect(() => quantileOfSorted([1], Number.NaN)).toThrow(InputError);
  });
});

describe('bootstrapMean', () => {
  it('has no width for equal values', () => {
    const interval = bootstrapMean(new Float64Array(5).fill(2.5), { seed: 1, repetitions: 20 });
    expect(interval).toEqual({ low: 2.5, high: 2.5 });
  });

  it('narrows with its level', () => {
    const data = Float64Array.from({ length: 30 }, (_, i) => (i * 37) % 30);
    const wide = bootstrapMean(data, { seed: 1, repetitions: 999, level: 0.99 });
    const narrow = bootstrapMean(data, { seed: 1, repetitions: 999, level: 0.5 });
    expect(wide.low).toBeLessThan(narrow.low);
    expect(wide.high).toBeGreaterThan(narrow.high);
  });

  it('refuses no values, no resamples, and a level that is none', () => {
    expect(() => bootstrapMean(new Float64Array(0), { seed: 1, repetitions: 9 })).toThrow(
      InputError,
    );
    expect(() => bootstrapMean(new Float64Array(1), { seed: 1, repetitions: 0.5 })).toThrow(
      InputError,
    );
    expect(() => percentileInterval(new Float64Array(3), 1)).toThrow(InputError);
  });
});

describe('ratioStandardError', () => {
  it('is the standard error of a mean where all blocks have one size', () => {
    fc.assert(
      fc.property(fc.array(fc.integer({ min: -999, max: 999 }), { minLength: 2 }), (list) => {
        const sums = Float64Array.from(list);
        const sizes = new Float64Array(list.length).fill(4);
        const expected = sampleStandardDeviation(list) / Math.sqrt(list.length) / 4;
        expect(ratioStandardError(sums, sizes)).toBeCloseTo(expected, 8);
      }),
    );
  });

  it('is 0 where every block has the same rate, and leaves out empty blocks', () => {
    const sums = Float64Array.of(2, 0, 6, 10);
    const sizes = Float64Array.of(1, 0, 3, 5);
    expect(ratioStandardError(sums, sizes)).toBe(0);
  });

  it('is unknown below two blocks', () => {
    expect(ratioStandardError(Float64Array.of(2, 0), Float64Array.of(1, 0))).toBeUndefined();
    expect(ratioStandardError(new Float64Array(0), new Float64Array(0))).toBeUndefined();
  });
});
