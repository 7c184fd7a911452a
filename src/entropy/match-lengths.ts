import { BugError } from '../errors/errors.ts';
import type { Interval } from '../statistics/bootstrap.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { EntropyByOrder } from './entropy-by-order.ts';
import { type MatchMeasurements, measureMatches } from './match-measurements.ts';

/** Fewest positions with a past: some in each of the blocks that the spread is judged by. */
const FEWEST_POSITIONS = 1000;
const NORMAL_95 = 1.96;

/** An entropy rate by match lengths: without a fixed order. Rates are in bits per symbol. */
export interface MatchLengthEntropy extends Interval {
  /** `publishedBitsPerSymbol` with its bias taken out, where `valid`; else that figure itself. */
  readonly bitsPerSymbol: number;
  /** 95 % interval of `bitsPerSymbol` by the spread between blocks; from 0 to log2 m where not `valid`. */
  readonly low: number;
  readonly high: number;
  readonly valid: boolean;
  /** Why it is not valid, or what it rests on; half a sentence. */
  readonly reason: string;
  /** Order of the twin that the bias was measured on, −1 for none. */
  readonly order: number;
  /** 1 ÷ mean of Λ_i ÷ log2(i + 1), as published; too low by a tenth and more on much data of high entropy. */
  readonly publishedBitsPerSymbol: number;
  /** Components of the Lempel–Ziv history of 1976, times log2 n, over n; above the rate on any real length. */
  readonly lempelZivBitsPerSymbol: number;
  readonly components: number;
  /** Mean length of a match, Λ − 1. */
  readonly meanMatch: number;
  readonly positions: number;
  /** Symbols looked at: all of them, or those of the pieces. */
  readonly symbolsUsed: number;
}

/**
 * Estimates the entropy rate by how far a sequence repeats its past.
 *
 * Λ_i is 1 + the length of the longest string that begins at position i and occurs wholly in positions 0 … i − 1: the
 * window grows with i. Λ_i ÷ log2(i + 1) tends to 1 ÷ rate, but slowly: the published mean is far too low for large
 * alphabets. The bias is measured on a twin, drawn from the Markov chain of the data's largest estimable order k: with r
 * the published rate of a block, the estimate is the mean over blocks of r(data) ÷ r(twin) × corrected H_k. It is H_k where
 * matches are as long as order k alone makes them, and lower where the data repeat themselves beyond that. A mean
 * over blocks, since bits add up over a file: one long copy would else decide the mean of all match lengths.
 *
 * Matches run on over message ends, in every scope: in a short message's own past there is nearly nothing to find.
 * The interval takes blocks for independent and knows nothing of bias that the twin does not share, so a source whose
 * repeats reach further than the data is still estimated too high.
 * Source: I. Kontoyiannis, P. H. Algoet, Yu. M. Suhov, A. J. Wyner, "Nonparametric Entropy Estimation for Stationary Processes
 * and Random Fields, with Applications to English Text", 1998 (increasing window); the twin is our own addition.
 * @param entropy       of the same sequence; its scope does not matter to the matches
 * @param measurements  where they are known already: those of the largest estimable order
 * Cost: that of {@link measureMatches}.
 */
export function matchLengthEntropy(
  sequence: SymbolSequence,
  entropy: Pick<EntropyByOrder, 'orders' | 'largestEstimable'>,
  measurements: MatchMeasurements = measureMatches(sequence, entropy.largestEstimable),
): MatchLengthEntropy {
  const { own, twin, order } = measurements;
  if (order !== entropy.largestEstimable) {
    throw new BugError(`matches of a twin of order ${order} were given for another order`);
  }
  const most = Math.log2(sequence.alphabetSize);
  const positions = sum(own.positions);
  const { symbolsUsed, components, matchSum } = measurements;
  const published = positions === 0 ? 0 : positions / sum(own.shares);
  const meanMatch = positions === 0 ? 0 : matchSum / positions;
  const figures = {
    publishedBitsPerSymbol: published,
    lempelZivBitsPerSymbol: symbolsUsed === 0 ? 0 : measurements.componentBits / symbolsUsed,
    components,
    meanMatch,
    positions,
    symbolsUsed,
    order,
  };
  const fault = faultOf(positions, order);
  if (fault !== undefined) {
    return {
      ...figures,
      bitsPerSymbol: published,
      low: 0,
      high: most,
      valid: false,
      reason: fault,
    };
  }
  const { corrected } = entropy.orders[order];
  const bits = own.shares.map((share, b) =>
    own.positions[b] === 0 ? 0 : (own.positions[b] * corrected * twin[b]) / share,
  );
  const rate = sum(bits) / positions;
  const error = ratioStandardError(bits, own.positions) ?? most;
  const within = (value: number): number => Math.min(most, Math.max(0, value));
  const part =
    symbolsUsed < sequence.symbols.length
      ? `, in ${symbolsUsed} of ${sequence.symbols.length} symbols`
      : '';
  return {
    ...figures,
    bitsPerSymbol: within(rate),
    low: within(rate - NORMAL_95 * error),
    high: within(rate + NORMAL_95 * error),
    valid: true,
    reason: `matches of ${meanMatch.toFixed(1)} symbols on average, against a twin of order ${order}${part}`,
  };
}

function faultOf(positions: number, order: number): string | undefined {
  if (positions < FEWEST_POSITIONS) return `too few symbols: ${positions} have a past`;
  if (order < 0) return 'no order is estimable, so that the bias cannot be measured';
  return undefined;
}

function sum(values: Float64Array): number {
  return values.reduce((a, b) => a + b, 0);
}
