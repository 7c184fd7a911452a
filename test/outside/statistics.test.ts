/**
 * Statistics computed outside with numpy and scipy: bootstrap intervals of means by the percentile method and BCa (Efron &
 * Tibshirani 1993, §13.3 and §14.3), p-values adjusted by Holm 1979, exact permutation counts. One bootstrap case enumerates
 * all resamples, so that no generator is involved; the other resamples 200 000 times.
 */
import { describe, expect, it } from 'vitest';
import { bcaInterval, bcaMean } from '../../src/statistics/bca.ts';
import { bootstrapMean, percentileInterval } from '../../src/statistics/bootstrap.ts';
import { holmAdjusted } from '../../src/statistics/holm.ts';
import { signFlipTest, twoSampleTest } from '../../src/statistics/permutation.ts';
import { quantileOfSorted } from '../../src/statistics/quantiles.ts';
import { exhaustiveResamples } from '../statistics/exhaustive-resamples.ts';
import vectors from './vectors/statistics.json' with { type: 'json' };

const caseOf = (kind: string) => {
  const { data = [], ...rest } = vectors.cases.find((c) => c.kind === kind)!;
  return { data, ...rest };
};

const meanOf = (values: readonly number[]) => values.reduce((sum, v) => sum + v, 0) / values.length;

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

describe('bias-corrected and accelerated bootstrap of a mean', () => {
  it('over all 3125 resamples of five values is [2.2, 8.0]', () => {
    const { data, bca95_linear_quantile: expected } = caseOf('bootstrap_exhaustive_mean');
    const means = Float64Array.from([...exhaustiveResamples(data.length)], (drawn) => {
      // Summed in the order of the data, so that equal means come out equal.
      let sum = 0;
      drawn.forEach((times, i) => {
        sum += times * data[i];
      });
      return sum / data.length;
    });
    const jackknife = Float64Array.from(data, (_, i) => meanOf(data.filter((_v, j) => j !== i)));
    const interval = bcaInterval(means, meanOf(data), jackknife, 0.95);
    expect(interval.low).toBeCloseTo(expected![0], 12);
    expect(interval.high).toBeCloseTo(expected![1], 12);
  });

  it('over 200 000 resamples of twenty values agrees within the 0.01 that another generator may change', () => {
    const { data, scipy_200000_bca95: expected } = caseOf('bootstrap_mean');
    const interval = bcaMean(Float64Array.from(data), { seed: 2, repetitions: 200_000 });
    expect(Math.abs(interval.low - expected![0])).toBeLessThan(0.01);
    expect(Math.abs(interval.high - expected![1])).toBeLessThan(0.01);
  });
});

describe('p-values adjusted by Holm', () => {
  const cases = vectors.cases.filter((c) => c.kind === 'adjusted_p');

  it.each(cases.map((c) => [c.p!.length, c]))('of %d p-values', (_, { p, holm, ...rest }) => {
    const adjusted = holmAdjusted(p!);
    adjusted.forEach((value, i) => {
      expect(value).toBeCloseTo(holm![i], 12);
    });
    // The 15 are the example of Benjamini & Hochberg 1995: three rejections.
    expect([...adjusted].filter((value) => value <= 0.05).length).toBe(
      rest['holm_rejections_at_0.05'],
    );
  });

  it('has the three cases', () => {
    expect(cases.length).toBe(3);
  });
});

describe('exact permutation tests', () => {
  it('flip the signs of ten differences as an enumeration outside does', () => {
    const { differences_in_hundredths: hundredths, ...expected } = caseOf('paired_sign_flip_exact');
    for (const unit of [1, 0.01]) {
      expect(signFlipTest(hundredths!.map((d) => d * unit))).toEqual({
        greater: expected.one_sided_count,
        twoSided: expected.two_sided_count,
        total: expected.total,
      });
    }
  });

  it('deal eleven values into two groups as an enumeration outside does', () => {
    const { a, b, ...expected } = caseOf('two_sample_permutation_exact');
    expect(twoSampleTest(a!, b!)).toEqual({
      greater: expected.count_greater,
      twoSided: expected.count_two_sided,
      total: expected.total,
    });
  });
});
