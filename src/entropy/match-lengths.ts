import type { Interval } from '../statistics/bootstrap.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import { Repeats } from '../models/suffix-repeats.ts';
import { type SortedSuffixes, sortedSuffixes } from '../models/suffix-common.ts';
import { markovTwin } from '../models/suffix-twin.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';
import type { EntropyByOrder } from './entropy-by-order.ts';

/** Symbols of a piece at most: sorting takes about 45 bytes for each. */
export const LARGEST_PIECE = 2 ** 22;
/** Longer sequences are judged by so many pieces, evenly spread, each matched with its own past only. */
const MOST_PIECES = 2;
/** Fewest positions in a block for its rate to be told from chance. */
const FEWEST_IN_BLOCK = 16;
const NORMAL_95 = 1.96;
const TWIN_SEED = 1;

export const MATCH_LENGTH_SOURCE =
  'I. Kontoyiannis, P. H. Algoet, Yu. M. Suhov, A. J. Wyner, "Nonparametric Entropy Estimation for Stationary Processes and Random Fields, with Applications to English Text", 1998 (increasing window)';

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

export interface MatchLengthOptions {
  /** Contiguous blocks, 2 … 256, over which the spread is judged; 64 when absent. */
  readonly blocks?: number;
  /** Largest piece, ≥ 2 symbols; {@link LARGEST_PIECE} when absent. */
  readonly largestPiece?: number;
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
 * @param entropy  of the same sequence
 * Cost: linear time; about 45 bytes a symbol of one piece.
 */
export function matchLengthEntropy(
  sequence: SymbolSequence,
  entropy: Pick<EntropyByOrder, 'orders' | 'largestEstimable'>,
  options: MatchLengthOptions = {},
): MatchLengthEntropy {
  const { symbols, alphabetSize } = sequence;
  const pieces = piecesOf(symbols, options.largestPiece ?? LARGEST_PIECE);
  const blocksEach = Math.max(1, Math.ceil((options.blocks ?? 64) / Math.max(1, pieces.length)));
  const order = entropy.largestEstimable;
  const data = pieces.map((piece) => measurePiece(piece, blocksEach, order));
  const sum = (of: (piece: MeasuredPiece) => number): number =>
    data.reduce((total, piece) => total + of(piece), 0);

  const symbolsUsed = sum((piece) => piece.symbolCount);
  const positions = sum((piece) => total(piece.own.positions));
  const published = positions === 0 ? 0 : positions / sum((piece) => total(piece.own.shares));
  const components = sum((piece) => piece.components);
  const common = {
    publishedBitsPerSymbol: published,
    lempelZivBitsPerSymbol:
      symbolsUsed === 0
        ? 0
        : sum((piece) => piece.components * Math.log2(piece.symbolCount)) / symbolsUsed,
    components,
    meanMatch: positions === 0 ? 0 : sum((piece) => piece.matchSum) / positions,
    positions,
    symbolsUsed,
  };
  const most = Math.log2(alphabetSize);
  const refuse = (reason: string): MatchLengthEntropy => ({
    ...common,
    bitsPerSymbol: published,
    low: 0,
    high: most,
    valid: false,
    reason,
    order: -1,
  });
  if (positions < FEWEST_IN_BLOCK * blocksEach * pieces.length || positions === 0) {
    return refuse(`too few symbols: ${positions} positions have a past`);
  }
  if (order < 0) return refuse('no order is estimable, so that its bias cannot be measured');
  if (common.meanMatch < order + 1) {
    return refuse(
      `matches of ${common.meanMatch.toFixed(1)} symbols on average see no further than order ${order}`,
    );
  }

  const corrected = entropy.orders[order].corrected;
  const sizes: number[] = [];
  const sums: number[] = [];
  for (const { own, twin } of data) {
    for (let b = 0; b < blocksEach; b++) {
      const size = own.positions[b];
      sizes.push(size);
      sums.push(size === 0 ? 0 : (size * corrected * twin.shares[b]) / own.shares[b]);
    }
  }
  const bitsPerSymbol = sums.reduce((a, b) => a + b, 0) / positions;
  const error = ratioStandardError(Float64Array.from(sums), Float64Array.from(sizes)) ?? most;
  const within = (bits: number): number => Math.min(most, Math.max(0, bits));
  return {
    ...common,
    bitsPerSymbol: within(bitsPerSymbol),
    low: within(bitsPerSymbol - NORMAL_95 * error),
    high: within(bitsPerSymbol + NORMAL_95 * error),
    valid: true,
    reason: `matches of ${common.meanMatch.toFixed(1)} symbols on average, against a twin of order ${order}${
      symbolsUsed < symbols.length ? `, in ${symbolsUsed} of ${symbols.length} symbols` : ''
    }`,
    order,
  };
}

function total(values: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i];
  return sum;
}

function piecesOf(symbols: SymbolArray, largest: number): SymbolArray[] {
  const { length } = symbols;
  if (length <= largest) return length === 0 ? [] : [symbols];
  const count = Math.min(MOST_PIECES, Math.ceil(length / largest));
  const size = Math.min(largest, Math.floor(length / count));
  return Array.from({ length: count }, (_, p) => {
    const from = Math.floor((p * (length - size)) / Math.max(1, count - 1));
    return symbols.subarray(from, from + size);
  });
}

interface MeasuredPiece {
  readonly symbolCount: number;
  readonly components: number;
  readonly matchSum: number;
  readonly own: MatchShares;
  readonly twin: MatchShares;
}

/** Σ Λ_i ÷ log2(i + 1) of each block, and its positions. */
interface MatchShares {
  readonly shares: Float64Array;
  readonly positions: Float64Array;
}

function measurePiece(symbols: SymbolArray, blocks: number, order: number): MeasuredPiece {
  const suffixes = sortedSuffixes(symbols);
  const { lengths, components } = lookBack(suffixes);
  let matchSum = 0;
  for (let i = 1; i < lengths.length; i++) matchSum += lengths[i];
  const own = matchShares(lengths, blocks);
  // The twin is sorted after the data's own suffixes were let go of.
  const twin =
    order < 0
      ? own
      : matchShares(
          new Repeats(sortedSuffixes(markovTwin(symbols, suffixes, order, TWIN_SEED))).pastMatches(),
          blocks,
        );
  return { symbolCount: symbols.length, components, matchSum, own, twin };
}

function lookBack(suffixes: SortedSuffixes): { lengths: Uint32Array; components: number } {
  const repeats = new Repeats(suffixes);
  return { lengths: repeats.pastMatches(), components: repeats.componentCount() };
}

function matchShares(lengths: Uint32Array, blocks: number): MatchShares {
  const shares = new Float64Array(blocks);
  const positions = new Float64Array(blocks);
  const { length } = lengths;
  for (let i = 1; i < length; i++) {
    const block = Math.floor((i * blocks) / length);
    shares[block] += (lengths[i] + 1) / Math.log2(i + 1);
    positions[block]++;
  }
  return { shares, positions };
}
