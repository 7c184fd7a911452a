import { InputError } from '../errors/errors.ts';

/**
 * The q-quantile of values in rising order: linear between the order statistics around (n − 1)·q.
 *
 * @param sorted  shape [n], n ≥ 1, rising
 * @param q       0 … 1
 * @throws InputError for no values, or q outside 0 … 1
 * Source: Hyndman & Fan, "Sample quantiles in statistical packages", 1996, definition 7.
 */
export function quantileOfSorted(sorted: ArrayLike<number>, q: number): number {
  if (sorted.length === 0 || !(q >= 0 && q <= 1)) {
    throw new InputError('a quantile needs values and a share', {
      expected: 'at least one value, and a share from 0 to 1',
      got: `${sorted.length} values, share ${q}`,
    });
  }
  const exact = (sorted.length - 1) * q;
  // A share such as 0.025 is not exact in binary: a whole index must not become a hair more or less.
  const nearest = Math.round(exact);
  const at = Math.abs(exact - nearest) < 1e-9 ? nearest : exact;
  const below = Math.floor(at);
  const above = Math.min(below + 1, sorted.length - 1);
  return sorted[below] + (sorted[above] - sorted[below]) * (at - below);
}

/** The middle value of values in any order, or the mean of the two middle ones; leaves its argument alone. */
export function median(values: ArrayLike<number>): number {
  return quantileOfSorted(Float64Array.from(values).sort(), 0.5);
}
