import { InputError } from '../errors/errors.ts';

/**
 * The probability that a standard normal number lies below x; to about 15 digits of the smaller tail.
 *
 * Source: the series and the continued fraction of Abramowitz & Stegun, "Handbook of Mathematical Functions", 1964,
 * 26.2.11 and 26.2.14.
 */
export function normalShareBelow(x: number): number {
  if (Number.isNaN(x)) return Number.NaN;
  const size = Math.abs(x);
  if (size > 38) return x < 0 ? 0 : 1;
  const density = Math.exp((-size * size) / 2) / Math.sqrt(2 * Math.PI);
  if (size < 3) {
    let term = size;
    let sum = size;
    for (let k = 3; Math.abs(term) > 1e-17 * sum; k += 2) {
      term *= (size * size) / k;
      sum += term;
    }
    return x < 0 ? 0.5 - density * sum : 0.5 + density * sum;
  }
  let fraction = size;
  for (let k = 120; k >= 1; k--) fraction = size + k / fraction;
  return x < 0 ? density / fraction : 1 - density / fraction;
}

/**
 * The number below which a standard normal number lies with probability `share`.
 * @throws InputError for a share outside 0 … 1; 0 and 1 give the infinities
 */
export function normalQuantile(share: number): number {
  if (!(share >= 0 && share <= 1)) {
    throw new InputError('a quantile needs a share from 0 to 1', { got: String(share) });
  }
  if (share === 0) return Number.NEGATIVE_INFINITY;
  if (share === 1) return Number.POSITIVE_INFINITY;
  if (share > 0.5) return -normalQuantile(1 - share);
  let low = -39;
  let high = 0;
  // Halving ends when no number lies between; it needs no start value and cannot run away.
  for (let middle = -1; middle !== low && middle !== high; middle = (low + high) / 2) {
    if (normalShareBelow(middle) < share) low = middle;
    else high = middle;
  }
  return high;
}

/**
 * The number of which Student's t with this many degrees of freedom lies below with probability `share`, by the first
 * three terms of its expansion around the normal quantile: to 0.002 from 10 degrees on, for shares from 0.01 to 0.99.
 *
 * Source: Abramowitz & Stegun 1964, 26.7.5.
 */
export function studentQuantile(share: number, freedom: number): number {
  const z = normalQuantile(share);
  const first = (z ** 3 + z) / 4;
  const second = (5 * z ** 5 + 16 * z ** 3 + 3 * z) / 96;
  const third = (3 * z ** 7 + 19 * z ** 5 + 17 * z ** 3 - 15 * z) / 384;
  return z + first / freedom + second / freedom ** 2 + third / freedom ** 3;
}

/**
 * About the number below which a chi-square number lies with probability `share`.
 * Source: Wilson & Hilferty, "The distribution of chi-square", 1931 (cube-root approximation).
 */
export function chiSquareQuantile(share: number, freedom: number): number {
  if (freedom === 0) return 0;
  const spread = 2 / (9 * freedom);
  return freedom * Math.max(0, 1 - spread + normalQuantile(share) * Math.sqrt(spread)) ** 3;
}
