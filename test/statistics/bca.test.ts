import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { bcaInterval, bcaMean } from '../../src/statistics/bca.ts';
import { percentileInterval } from '../../src/statistics/bootstrap.ts';

describe('the BCa interval', () => {
  it('is the percentile interval where nothing is skewed', () => {
    const statistics = Float64Array.from({ length: 1001 }, (_, i) => i - 500);
    const jackknife = Float64Array.of(-1, 1, -2, 2);
    expect(bcaInterval(statistics.slice(), 0, jackknife, 0.9).low).toBeCloseTo(
      percentileInterval(statistics.slice(), 0.9).low,
      9,
    );
  });

  it('moves up for a mean of values with a long upper tail', () => {
    const values = Float64Array.from({ length: 40 }, (_, i) => 1.2 ** i);
    const resampling = { seed: 4, repetitions: 4000 };
    const skewed = bcaMean(values, resampling);
    const mirrored = bcaMean(
      values.map((v) => -v),
      resampling,
    );
    const mean = values.reduce((sum, v) => sum + v, 0) / 40;
    expect(skewed.high - mean).toBeGreaterThan(mean - skewed.low);
    expect(-mirrored.high).toBeCloseTo(skewed.low, 9);
    expect(-mirrored.low).toBeCloseTo(skewed.high, 9);
  });

  it('has no width for equal values, and stays within the resamples where all lie on one side', () => {
    expect(bcaMean(new Float64Array(6).fill(2.5), { seed: 1, repetitions: 50 })).toEqual({
      low: 2.5,
      high: 2.5,
    });
    const oneSided = bcaInterval(Float64Array.of(1, 2, 3), 9, Float64Array.of(1, 5), 0.95);
    expect(oneSided.low).toBeGreaterThanOrEqual(1);
    expect(oneSided.high).toBeLessThanOrEqual(3);
  });

  it('refuses too few values, no resamples and a level that is none', () => {
    const two = Float64Array.of(1, 2);
    expect(() => bcaMean(Float64Array.of(1), { seed: 1, repetitions: 9 })).toThrow(InputError);
    expect(() => bcaMean(new Float64Array(0), { seed: 1, repetitions: 9 })).toThrow(InputError);
    expect(() => bcaMean(two, { seed: 1, repetitions: 0 })).toThrow(InputError);
    expect(() => bcaInterval(new Float64Array(0), 1, two, 0.95)).toThrow(InputError);
    expect(() => bcaInterval(two, 1, two, 1)).toThrow(InputError);
  });
});
