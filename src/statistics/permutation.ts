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
 * Whether paired differences lean to one side: their sum beside the sums under every choice of signs.
 *
 * @param differences  shape [n], 1 ≤ n ≤ 24
 * @throws InputError for a number of differences out of range
 * Cost: 2^n additions.
 * Source: Fisher, "The Design of Experiments", 1935, §21.
 */
export function signFlipTest(differences: ArrayLike<number>): PermutationCounts {
  const n = differences.length;
  checkCount(n === 0 ? 0 : 2 ** n);
  let observed = 0;
  let size = 0;
  for (let i = 0; i < n; i++) {
    observed += differences[i];
    size += Math.abs(differences[i]);
  }
  const slack = size * ROUNDING;
  let greater = 0;
  let twoSided = 0;
  const flip = (at: number, sum: number): void => {
    if (at === n) {
      if (sum >= observed - slack) greater++;
      if (Math.abs(sum) >= Math.abs(observed) - slack) twoSided++;
      return;
    }
    flip(at + 1, sum + differences[at]);
    flip(at + 1, sum - differences[at]);
  };
  flip(0, 0);
  return { greater, twoSided, total: 2 ** n };
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
