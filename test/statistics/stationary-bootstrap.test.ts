import fc from 'fast-check';
import { sampleVariance } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { runSpread } from '../../src/statistics/stationary-bootstrap.ts';

/** The sum of one resample, drawn as Politis & Romano 1994, §2, describe it: runs in a circle, geometric lengths. */
function resampledSum(values: Float64Array, meanRun: number, generator: SeededGenerator): number {
  let sum = 0;
  let at = 0;
  for (let i = 0; i < values.length; i++) {
    at =
      i === 0 || generator.real() < 1 / meanRun
        ? generator.integer(0, values.length - 1)
        : (at + 1) % values.length;
    sum += values[at];
  }
  return sum;
}

describe('runSpread', () => {
  it('is the variance of a sum of independent values where runs have length 1', () => {
    fc.assert(
      fc.property(
        fc.array(fc.integer({ min: -99, max: 99 }), { minLength: 2, maxLength: 40 }),
        (list) => {
          const { variance, freedom } = runSpread(Float64Array.from(list), 1);
          expect(variance).toBeCloseTo(list.length * sampleVariance(list), 6);
          expect(freedom).toBeCloseTo(list.length - 1, 9);
        },
      ),
    );
  });

  it.each([1, 3, 8])('is what drawn resamples scatter, in runs of %d', (meanRun) => {
    const generator = new SeededGenerator(`values ${meanRun}`);
    const values = new Float64Array(60);
    let level = 0;
    for (let i = 0; i < values.length; i++) {
      level = 0.7 * level + generator.real() - 0.5;
      values[i] = level;
    }
    const draws = 20_000;
    const sums = Array.from({ length: draws }, () => resampledSum(values, meanRun, generator));
    // What the closed form gives back for centring: the share of variance in the lags that it sums.
    const goesOn = 1 - 1 / meanRun;
    let weights = 1;
    for (let lag = 1; lag < 60; lag++) weights += 2 * (1 - lag / 60) * goesOn ** lag;
    const expected = sampleVariance(sums) / (1 - weights / 60);
    // A variance of 20 000 sums is known to 1 %: four of those.
    expect(Math.abs(runSpread(values, meanRun).variance / expected - 1)).toBeLessThan(0.04);
  });

  it('has no width where nothing differs, and knows less in longer runs', () => {
    expect(runSpread(new Float64Array(9).fill(3), 2).variance).toBe(0);
    const values = Float64Array.from({ length: 64 }, (_, i) => i % 7);
    expect(runSpread(values, 4).freedom).toBeLessThan(runSpread(values, 2).freedom);
  });

  it('refuses a lone value and impossible runs', () => {
    expect(() => runSpread(Float64Array.of(1), 1)).toThrow(InputError);
    expect(() => runSpread(new Float64Array(4), 0.5)).toThrow(InputError);
    expect(() => runSpread(new Float64Array(4), 5)).toThrow(InputError);
    expect(() => runSpread(new Float64Array(4), Number.NaN)).toThrow(InputError);
  });
});
