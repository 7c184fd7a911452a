import { InputError } from '../errors/errors.ts';

/** Exact counts of a permutation test; a p-value is a count ÷ `total`. */
export interface PermutationCounts {
  /** Rearrangements whose statistic is as large as the observed one, or larger. */
  readonly greater: number;
  /** Those whose statistic is as far from 0, or further, on either side. */
  readonly twoSided: number;
  readonly total: number;
}

/** Most rearrangements that are looked at one by one. */
const MOST_REARRANGEMENTS = 2 ** 24;

/** A sum of figures need not come out the same in another order; differences below this share of the whole are none. */
const ROUNDING = 1e-12;

/**
 * Whether paired differences lean to one side: their sum beside the sums under every choice of signs. It supposes that under
 * the null hypothesis each difference is as likely above 0 as below, whatever its size; units of unlike size are allowed.
 *
 * @param differences  shape [n], 1 ≤ n ≤ 24
 * @throws InputError for a number of differences out of range
 * Cost: 2^(n/2) additions and comparisons, and that much memory: the sums of each half are sorted and met in the middle.
 * Source: Fisher, "The Design of Experiments", 1935, §21; the two sorted halves after Horowitz & Sahni, "Computing partitions
 * with applications to the knapsack problem", 1974.
 */
export function signFlipTest(differences: ArrayLike<number>): PermutationCounts {
  const n = differences.length;
  const total = n === 0 ? 0 : 2 ** n;
  checkCount(total);
  let observed = 0;
  let size = 0;
  let least = Number.POSITIVE_INFINITY;
  let zeros = 0;
  for (let i = 0; i < n; i++) {
    const difference = differences[i];
    observed += difference;
    size += Math.abs(difference);
    if (difference === 0) zeros++;
    else least = Math.min(least, Math.abs(difference));
  }
  const slack = size * ROUNDING;
  // All of one sign: whatever is turned round, the sum comes nearer to 0, unless it is nothing that is turned.
  if (size > 0 && Math.abs(observed) >= size - slack && least > slack) {
    const same = 2 ** zeros;
    return { greater: observed > 0 ? same : total, twoSided: 2 * same, total };
  }
  const middle = n >> 1;
  const first = signedSums(differences, 0, middle);
  const second = signedSums(differences, middle, n);
  const distance = Math.abs(observed) - slack;
  return {
    greater: countAtLeast(first, second, observed - slack),
    // Sums lie as often above as below 0, so one side counts for both; unless 0 itself is far enough.
    twoSided: distance <= 0 ? total : 2 * countAtLeast(first, second, distance),
    total,
  };
}

/** The sums of `values[from … to − 1]` under every choice of signs, rising. */
function signedSums(values: ArrayLike<number>, from: number, to: number): Float64Array {
  const room = 2 ** (to - from);
  let sums = new Float64Array(room);
  let merged = new Float64Array(room);
  let length = 1;
  for (let i = from; i < to; i++) {
    const value = Math.abs(values[i]);
    let up = 0;
    let down = 0;
    // The sums less the value run out first, since each of them lies below one of the others.
    for (let at = 0; at < 2 * length; at++) {
      if (down < length && sums[down] - value <= sums[up] + value)
        merged[at] = sums[down++] - value;
      else merged[at] = sums[up++] + value;
    }
    length *= 2;
    [sums, merged] = [merged, sums];
  }
  return sums;
}

/** Pairs of one value of each rising list whose sum is `least` or more. */
function countAtLeast(first: Float64Array, second: Float64Array, least: number): number {
  let count = 0;
  let from = second.length;
  for (const value of first) {
    while (from > 0 && value + second[from - 1] >= least) from--;
    count += second.length - from;
  }
  return count;
}

/**
 * Whether two groups differ in their means: the difference mean(a) − mean(b) beside those under every way to deal the values
 * into groups of these sizes.
 *
 * @throws InputError for an empty group, or more than 2^24 ways
 * Cost: as many steps as there are ways.
 * Source: Pitman, "Significance tests which may be applied to samples from any populations", 1937.
 */
export function twoSampleTest(a: ArrayLike<number>, b: ArrayLike<number>): PermutationCounts {
  const values = [...Array.from(a), ...Array.from(b)];
  const ways = a.length === 0 || b.length === 0 ? 0 : choose(values.length, a.length);
  checkCount(ways);
  let total = 0;
  let size = 0;
  for (const value of values) {
    total += value;
    size += Math.abs(value);
  }
  const difference = (sumA: number): number => sumA / a.length - (total - sumA) / b.length;
  let observedSum = 0;
  for (let i = 0; i < a.length; i++) observedSum += a[i];
  const observed = difference(observedSum);
  const slack = size * ROUNDING;
  let greater = 0;
  let twoSided = 0;
  const deal = (at: number, left: number, sum: number): void => {
    if (left === 0) {
      const found = difference(sum);
      if (found >= observed - slack) greater++;
      if (Math.abs(found) >= Math.abs(observed) - slack) twoSided++;
      return;
    }
    if (values.length - at > left) deal(at + 1, left, sum);
    deal(at + 1, left - 1, sum + values[at]);
  };
  deal(0, a.length, 0);
  return { greater, twoSided, total: ways };
}

function choose(n: number, k: number): number {
  let ways = 1;
  for (let i = 1; i <= k; i++) ways = (ways * (n - k + i)) / i;
  return Math.round(ways);
}

function checkCount(ways: number): void {
  if (ways >= 1 && ways <= MOST_REARRANGEMENTS) return;
  throw new InputError('these values cannot be rearranged one way at a time', {
    expected: `1 to ${MOST_REARRANGEMENTS} ways, and no empty group`,
    got: `${ways} ways`,
  });
}
