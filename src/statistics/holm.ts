import { InputError } from '../errors/errors.ts';

/**
 * p-values adjusted for how many are looked at: rejecting where the adjusted one is at most α makes the chance of any false
 * rejection at most α, however the tests depend on one another.
 *
 * @param p  shape [n], each 0 … 1, in any order
 * @returns shape [n], in the same order
 * @throws InputError for a p-value outside 0 … 1
 * Source: Holm, "A simple sequentially rejective multiple test procedure", 1979.
 */
export function holmAdjusted(p: ArrayLike<number>): Float64Array {
  const rising = Array.from({ length: p.length }, (_, i) => i).sort((a, b) => p[a] - p[b]);
  const adjusted = new Float64Array(p.length);
  let largest = 0;
  rising.forEach((at, rank) => {
    if (!(p[at] >= 0 && p[at] <= 1)) {
      throw new InputError('a p-value lies between 0 and 1', { got: String(p[at]) });
    }
    largest = Math.max(largest, Math.min(1, (p.length - rank) * p[at]));
    adjusted[at] = largest;
  });
  return adjusted;
}
