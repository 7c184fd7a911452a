import type { MessagePairs } from '../harness/run-all.ts';
import { pairedDifference } from '../statistics/paired-difference.ts';
import { signFlipTest } from '../statistics/permutation.ts';
import { neighboursLeanAlike } from '../statistics/serial-dependence.ts';
import {
  blockSums,
  blocksFor,
  type ComparisonBlocks,
  type ComparisonUnit,
  expandedLevel,
  LEAST_BLOCKS,
} from './comparison-blocks.ts';

/** Cell `b` against cell `a` of the same corpus: how many bits per symbol more it needs. */
export interface Comparison {
  readonly corpus: string;
  /** Ids of cells, without their fold where folds are pooled. */
  readonly a: string;
  readonly b: string;
  /** Bits per symbol, b − a, with the 95 % paired bootstrap interval of this pair on its own. */
  readonly difference: number;
  readonly low: number;
  readonly high: number;
  readonly units: number;
  readonly unit: ComparisonUnit;
  /** Of this pair on its own: {@link signFlipTest} over the units, on two sides. */
  readonly p: number;
  /** Adjusted for all pairs that were looked at beside it; `p` where there is none. */
  readonly adjustedP: number;
  /** `adjustedP` is at most 0.05. */
  readonly decided: boolean;
  /** Neighbouring units differ alike, in a trend or a slow swing: interval and p-value may promise too much. */
  readonly drifts: boolean;
  /** Where folds are pooled: how many there are, and in how many of them `b − a` has the sign of `difference`. */
  readonly folds?: { readonly count: number; readonly sameSign: number };
}

/** Pairs are told apart where an adjusted p-value is at most this. */
export const APART_AT = 0.05;

/** One side of a comparison: bits of each block. */
interface Side {
  readonly id: string;
  readonly blockBits: Float64Array;
}

/**
 * Share of all choices of signs of the block differences under which their sum is as far from 0. A permutation test, since
 * its p-values are exact from 2^(1 − units) up, while a bootstrap of 2000 resamples knows none below 1 in 2000, which an
 * adjustment for some hundred pairs turns into "not decided" always.
 */
export function signFlipP(a: Float64Array, b: Float64Array): number {
  const { twoSided, total } = signFlipTest(b.map((bits, i) => bits - a[i]));
  return twoSided / total;
}

/** The difference of two sides over the same blocks, with its interval; there are {@link LEAST_BLOCKS} or more. */
export function compareBlocks(
  corpus: string,
  a: Side,
  b: Side,
  symbols: Float64Array,
  unit: ComparisonUnit,
): Omit<Comparison, 'p' | 'adjustedP' | 'decided'> {
  const { difference, low, high, units } = pairedDifference({
    bitsA: a.blockBits,
    bitsB: b.blockBits,
    symbols,
    seed: 1,
    repetitions: 2000,
    level: expandedLevel(symbols.length),
  });
  const excess = symbols.map((count, i) => b.blockBits[i] - a.blockBits[i] - difference * count);
  const drifts = neighboursLeanAlike(excess);
  return { corpus, a: a.id, b: b.id, difference, low, high, units, unit, drifts };
}

/**
 * Two cells by their messages, on their own.
 *
 * @param filledMessages  where messages are filled, and pairs are of units: the fewest messages that one of the two has
 * @returns undefined when there are too few messages for an interval, or they are not the same on both sides
 */
export function compareCells(
  corpus: string,
  a: { readonly id: string; readonly pairs: MessagePairs },
  b: { readonly id: string; readonly pairs: MessagePairs },
  filledMessages?: number,
): Comparison | undefined {
  const messageCount = a.pairs.bits.length;
  const blocks: ComparisonBlocks = blocksFor(messageCount, filledMessages);
  if (messageCount !== b.pairs.bits.length || blocks.count < LEAST_BLOCKS) return undefined;
  const side = (cell: typeof a): Side => ({
    id: cell.id,
    blockBits: blockSums(cell.pairs.bits, blocks),
  });
  const [sideA, sideB] = [side(a), side(b)];
  const symbols = blockSums(a.pairs.symbols, blocks);
  const p = signFlipP(sideA.blockBits, sideB.blockBits);
  return {
    ...compareBlocks(corpus, sideA, sideB, symbols, blocks.unit),
    p,
    adjustedP: p,
    decided: p <= APART_AT,
  };
}
