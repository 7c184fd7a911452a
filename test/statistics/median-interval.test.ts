import { describe, expect, test } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { leastValuesForMedian, medianInterval } from '../../src/statistics/median-interval.ts';

/** Probability of k or more successes of n. */
function atLeast(k: number, n: number, p: number): number {
  let sum = 0;
  let ways = 1;
  for (let j = 0; j <= n; j++) {
    if (j >= k) sum += ways * p ** j * (1 - p) ** (n - j);
    ways = (ways * (n - j)) / (j + 1);
  }
  return sum;
}

/**
 * Quantile of the median over all resamples of an odd number n of values, exactly: the median of a resample is at most the
 * k-th value where more than half of the draws are. Source: Efron, "Bootstrap methods: another look at the jackknife", 1979, §3.
 */
function exactPlace(n: number, share: number): number {
  let k = 1;
  while (atLeast((n + 1) / 2, n, k / n) < share) k++;
  return k;
}

describe('the interval of a median', () => {
  test.each([
    // Student's t of n − 1 degrees of freedom at 97.5 %: tables of the t-distribution.
    [11, 2.2281],
    [15, 2.1448],
    [21, 2.086],
  ])(
    'of %i values lies where that over all resamples does, at the expanded level',
    (n, student) => {
      const values = Array.from({ length: n }, (_, i) => i + 1);
      const { median, low, high } = medianInterval(values, { seed: 5, repetitions: 20_000 });
      expect(median).toBe((n + 1) / 2);
      // Share of a normal law beyond √(n/(n − 1)) · t, by the trapezoid rule.
      const from = Math.sqrt(n / (n - 1)) * student;
      let tail = 0;
      for (let x = from; x < 10; x += 1e-4)
        tail += 1e-4 * (Math.exp(-((x + 5e-5) ** 2) / 2) / Math.sqrt(2 * Math.PI));
      expect(low).toBe(exactPlace(n, tail));
      expect(high).toBe(n + 1 - exactPlace(n, tail));
    },
  );

  test.each([
    [2, [3, 9]],
    [3, [1, 2, 12]],
    [5, [5, 1, 4, 2, 3]],
  ])('of %i values is at most their span', (_, values) => {
    const { low, high } = medianInterval(values, { seed: 1, repetitions: 2000 });
    expect(low).toBe(Math.min(...values));
    expect(high).toBe(Math.max(...values));
  });

  test('of one value, or of equal ones, has no width', () => {
    expect(medianInterval([4], { seed: 1, repetitions: 10 })).toEqual({
      median: 4,
      low: 4,
      high: 4,
    });
    expect(medianInterval([4, 4, 4, 4], { seed: 1, repetitions: 10 })).toEqual({
      median: 4,
      low: 4,
      high: 4,
    });
  });

  test.each([6, 10, 20])('of %i values holds the true median in 95 of 100 cases', (n) => {
    // 1000 trials; the ratio of two log-normal figures with spikes, whose median is 1 by symmetry.
    const generator = new SeededGenerator(`median ${n}`);
    const jitter = () => {
      const normal =
        Math.sqrt(-2 * Math.log(1 - generator.real())) * Math.cos(2 * Math.PI * generator.real());
      return Math.exp(0.02 * normal) * (generator.real() < 0.04 ? 1.5 : 1);
    };
    let held = 0;
    for (let seed = 0; seed < 1000; seed++) {
      const values = Array.from({ length: n }, () => jitter() / jitter());
      const { low, high } = medianInterval(values, { seed, repetitions: 400 });
      if (low <= 1 && high >= 1) held++;
    }
    // Three standard deviations of a binomial below 95 %.
    expect(held / 1000).toBeGreaterThanOrEqual(0.95 - 3 * Math.sqrt((0.95 * 0.05) / 1000));
    expect(held).toBeLessThan(1000);
  });

  test('needs six values to keep 95 %, eight for 99 %', () => {
    // All n values on one side of the median: 2 · 2^−n.
    expect(leastValuesForMedian(0.95)).toBe(6);
    expect(leastValuesForMedian(0.99)).toBe(8);
  });

  test('of no values is refused', () => {
    expect(() => medianInterval([], { seed: 1, repetitions: 10 })).toThrow(InputError);
  });
});
