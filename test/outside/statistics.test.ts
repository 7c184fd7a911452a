/**
 * Bootstrap intervals of means, computed outside with numpy and scipy by the percentile method of Efron & Tibshirani 1993,
 * §13.3. One case enumerates all resamples, so that no generator is involved; the other resamples 200 000 times.
 */
import { describe, expect, it } from 'vitest';
import { bootstrapMean, percentileInterval } from '../../src/statistics/bootstrap.ts';
import { quantileOfSorted } from '../../src/statistics/quantiles.ts';
import { exhaustiveResamples } from '../statistics/exhaustive-resamples.ts';
import vectors from './vectors/statistics.json' with { type: 'json' };

const caseOf = (kind: string) => vectors.cases.find((c) => c.kind === kind)!;

describe('percentile bootstrap of a mean', () => {
  it('over all 3125 resamples of five values is [2.0, 7.8]', () => {
    const { data, percentile95_linear_quantile: expected } = caseOf('bootstrap_exhaustive_mean');
    const means = Float64Array.from([...exhaustiveResamples(data.length)], (drawn) => {
      let sum = 0;
      drawn.forEach((times, i) => {
        sum += times * data[i];
      });
      return sum / data.length;
    });
    const interval = percentileInterval(means.slice(), 0.95);
    expect(interval.low).toBeCloseTo(expected![0], 12);
    expect(interval.high).toBeCloseTo(expected![1], 12);

    means.sort();
    const repetitions = 20_000;
    const drawn = bootstrapMean(Float64Array.from(data), { seed: 11, repetitions });
    // The level of a drawn quantile varies by √(q(1 − q)/r): four of those on either side.
    const slack = 4 * Math.sqrt((0.025 * 0.975) / repetitions);
    expect(drawn.low).toBeGreaterThanOrEqual(quantileOfSorted(means, 0.025 - slack) - 1e-9);
    expect(drawn.low).toBeLessThanOrEqual(quantileOfSorted(means, 0.025 + slack) + 1e-9);
    expect(drawn.high).toBeGreaterThanOrEqual(quantileOfSorted(means, 0.975 - slack) - 1e-9);
    expect(drawn.high).toBeLessThanOrEqual(quantileOfSorted(means, 0.975 + slack) + 1e-9);
  });

  it('over 200 000 resamples of twenty values agrees within the 0.01 that another generator may change', () => {
    const { data, scipy_200000_percentile95: expected } = caseOf('bootstrap_mean');
    const interval = bootstrapMean(Float64Array.from(data), { seed: 1, repetitions: 200_000 });
    expect(Math.abs(interval.low - expected![0])).toBeLessThan(0.01);
    expect(Math.abs(interval.high - expected![1])).toBeLessThan(0.01);
  });
});
