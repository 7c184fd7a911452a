import { InputError } from '../errors/errors.ts';

/** How far a sum strays when its terms are resampled in runs. */
export interface RunSpread {
  /** Variance of the resampled sum around its own mean. */
  readonly variance: number;
  /** Degrees of freedom with which the variance is known, by the weight of the lags it uses. */
  readonly freedom: number;
}

/**
 * The variance of Σ values under the stationary bootstrap, in closed form.
 *
 * A resample takes runs of neighbouring values, joined end to end in a circle, whose lengths are geometric with mean
 * `meanRun`, until it has as many values as there are. Two places of a resample d apart lie in one run with probability
 * (1 − 1/meanRun)^d and are independent otherwise, so that the variance over all resamples is
 * c₀ + 2 Σ (1 − d/n)(1 − 1/meanRun)^d c_d, with c_d the circular autocovariance. Drawing resamples of a sum could only
 * approximate this. As a spectral estimate it falls short by the share of variance that centring took from the lags it
 * sums; that is given back.
 *
 * @param values   shape [n], n ≥ 2, in their order
 * @param meanRun  1 … n; 1 takes the values for independent
 * Cost: n² ÷ 2 multiplications.
 * Source: Politis & Romano, "The stationary bootstrap", 1994, §2 and lemma 1.
 */
export function runSpread(values: Float64Array, meanRun: number): RunSpread {
  const n = values.length;
  if (n < 2 || !(meanRun >= 1 && meanRun <= n)) {
    throw new InputError('runs cannot be resampled like this', {
      expected: 'two values or more, in runs of mean length 1 up to their number',
      got: `${n} values in runs of mean length ${meanRun}`,
    });
  }
  let mean = 0;
  for (let i = 0; i < n; i++) mean += values[i];
  mean /= n;
  const goesOn = 1 - 1 / meanRun;
  let variance = 0;
  let weights = 0;
  let squaredWeights = 0;
  let weight = 1;
  for (let lag = 0; lag < n && weight > 1e-9; lag++) {
    let products = 0;
    for (let i = 0, j = lag; i < n; i++) {
      products += (values[i] - mean) * (values[j] - mean);
      if (++j === n) j = 0;
    }
    const times = lag === 0 ? 1 : 2;
    const share = weight * (1 - lag / n);
    variance += times * share * products;
    weights += times * share;
    squaredWeights += times * share * share;
    weight *= goesOn;
  }
  const left = Math.max(1 / n, 1 - weights / n);
  return { variance: Math.max(0, variance) / left, freedom: Math.max(1, n / squaredWeights - 1) };
}
