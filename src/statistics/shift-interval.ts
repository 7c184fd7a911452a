import { InputError } from '../errors/errors.ts';
import type { Interval } from './bootstrap.ts';
import { normalQuantile } from './normal-law.ts';

/** By how much one sample lies above another. */
export interface Shift extends Interval {
  /** Median of all differences between a value of one and a value of the other. */
  readonly shift: number;
}

/** Up to so many pairs of values the law of the rank sum is counted out; beyond, it is close to normal. */
const MOST_COUNTED_PAIRS = 2500;

/**
 * By how much values of `above` exceed values of `below`, with an interval that holds the true shift with probability of at
 * least `level` whatever the law of the values, as long as it is the same for both but for the shift, and the values are
 * independent. A few wild values move it little. It does not resample: the interval lies between two of the differences, counted
 * from either end so that the rank-sum test at that level would not reject any shift inside.
 *
 * @param below  shape [n], n ≥ 1
 * @param above  shape [m], m ≥ 1
 * @returns the interval without end on both sides where there are too few values for that level
 * @throws InputError for an empty sample, or a level outside 0 … 1
 * Cost: 64 · (n + m) steps for each end, and n²m(n + m) additions once for n·m ≤ 2500.
 * Source: H. B. Mann, D. R. Whitney 1947; J. L. Hodges, E. L. Lehmann, "Estimates of location based on rank tests", 1963.
 */
export function shiftInterval(
  below: readonly number[],
  above: readonly number[],
  level: number,
): Shift {
  if (below.length === 0 || above.length === 0 || !(level > 0 && level < 1)) {
    throw new InputError('a shift cannot be told', {
      expected: 'at least one value on either side, and a level between 0 and 1',
      got: `${below.length} and ${above.length} values, level ${level}`,
    });
  }
  const a = Float64Array.from(below).sort();
  const b = Float64Array.from(above).sort();
  const pairs = a.length * b.length;
  const shift = (nthDifference(a, b, (pairs + 1) >> 1) + nthDifference(a, b, (pairs >> 1) + 1)) / 2;
  const outside = ranksOutside(a.length, b.length, level);
  return {
    shift,
    low: outside === 0 ? Number.NEGATIVE_INFINITY : nthDifference(a, b, outside),
    high: outside === 0 ? Number.POSITIVE_INFINITY : nthDifference(a, b, pairs + 1 - outside),
  };
}

/**
 * The largest c such that the count of differences below 0, when nothing is shifted, is below c with probability of at most
 * (1 − level)/2: the interval then starts at the c-th difference from either end. 0 where there is none.
 */
function ranksOutside(n: number, m: number, level: number): number {
  const tail = (1 - level) / 2;
  if (n * m > MOST_COUNTED_PAIRS) {
    const spread = Math.sqrt((n * m * (n + m + 1)) / 12);
    return Math.max(0, Math.floor((n * m + 1) / 2 + normalQuantile(tail) * spread));
  }
  const shares = rankSumShares(n, m);
  let sum = 0;
  let count = 0;
  // A hair of room, since 2/400 in binary may lie above 0.005 or below.
  while (sum + shares[count] <= tail * (1 + 1e-9)) sum += shares[count++];
  return count;
}

/** Probability of each count 0 … n·m of pairs in which the second value lies below the first, all orders equally likely. */
function rankSumShares(n: number, m: number): Float64Array {
  // ways[j·width + u]: orders of the values seen so far with j of the first sample and u such pairs.
  const width = n * m + 1;
  const ways = new Float64Array((n + 1) * width);
  ways[0] = 1;
  let total = 1;
  for (let place = 1; place <= n + m; place++) {
    // One more value at the top: of the first sample it stands above the place − j of the second.
    for (let j = Math.min(n, place); j >= 1; j--) {
      const seen = place - j;
      if (seen > m) continue;
      for (let u = width - 1; u >= seen; u--) {
        ways[j * width + u] += ways[(j - 1) * width + u - seen];
      }
    }
  }
  const shares = ways.slice(n * width);
  total = shares.reduce((sum, way) => sum + way, 0);
  return shares.map((way) => way / total);
}

/** The k-th least of all b − a, 1-based, by halving: no list of all pairs is made. Both sorted. */
function nthDifference(a: Float64Array, b: Float64Array, k: number): number {
  let low = b[0] - a[a.length - 1];
  let high = b[b.length - 1] - a[0];
  if (countUpTo(a, b, low) >= k) return low;
  // countUpTo(low) < k ≤ countUpTo(high) throughout; ends when no number lies between.
  for (
    let middle = (low + high) / 2;
    middle !== low && middle !== high;
    middle = (low + high) / 2
  ) {
    if (countUpTo(a, b, middle) >= k) high = middle;
    else low = middle;
  }
  return high;
}

/** Pairs with b − a ≤ limit. */
function countUpTo(a: Float64Array, b: Float64Array, limit: number): number {
  let count = 0;
  let j = 0;
  for (let i = 0; i < a.length; i++) {
    while (j < b.length && b[j] - a[i] <= limit) j++;
    count += j;
  }
  return count;
}
