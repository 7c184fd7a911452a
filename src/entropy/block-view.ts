import { log2OfCount, type Tallies, talliesOf } from '../models/context-counts-tallies.ts';
import { ABSENT, codeLengths, LONGEST_WORD_BITS } from '../stages/code-lengths.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { blockCounts } from './block-counts.ts';
import { blockEstimable } from './estimable.ts';
import { millerMadowTerm } from './miller-madow.ts';
import { nsbEntropyBits } from './nsb.ts';

/** Entropy of blocks of n symbols, per symbol, beside the best prefix code of the same blocks. */
export interface BlockEntropy {
  readonly n: number;
  readonly blocks: number;
  readonly distinct: number;
  /** Symbols at message ends that fill no block and are left out. */
  readonly leftOut: number;
  readonly plugInPerSymbol: number;
  /** Plug-in plus the Miller–Madow term. */
  readonly correctedPerSymbol: number;
  /** With alphabetSize^n cells; absent where that number of cells is too large to work with. */
  readonly nsbPerSymbol?: number;
  /** Mean length of an optimal prefix code fitted to these blocks, its table not counted; 0 for a lone block. */
  readonly huffmanPerSymbol: number;
  /** By the rule for blocks: enough blocks to state their entropy. */
  readonly estimable: boolean;
}

/** Most distinct blocks that are counted. */
const MOST_DISTINCT_BLOCKS = 2 ** 21;

const MOST_CELLS = 1e300;

/**
 * Entropy of non-overlapping blocks of 1 … `upto` symbols, phase 0 in each message, per symbol.
 *
 * With H the plug-in entropy per symbol and L ÷ n the code's mean length, H ≤ L/n < H + 1/n (Shannon 1948, §9, for the
 * frequencies of these very blocks). Only where a word would exceed 32 bits may the code be longer than optimal.
 * @returns one entry for each n, up to where no block is whole or more than `mostDistinct` blocks differ
 * Cost: for each n a pass with a hash table; up to 100 bytes a distinct block, most of it for the code.
 */
export function blockView(
  sequence: SymbolSequence,
  upto = 8,
  mostDistinct = MOST_DISTINCT_BLOCKS,
): BlockEntropy[] {
  const view: BlockEntropy[] = [];
  for (let n = 1; n <= upto; n++) {
    const counts = blockCounts(sequence, n, mostDistinct);
    if (counts === undefined || counts.length === 0) break;
    view.push(entropyOf(counts, n, sequence));
  }
  return view;
}

function entropyOf(
  counts: Uint32Array,
  n: number,
  { alphabetSize, symbols }: SymbolSequence,
): BlockEntropy {
  const tallies = talliesOf(counts);
  const { distinct, total: blocks } = tallies;
  const entropyBits = plugInBits(tallies);
  const cells = alphabetSize ** n;
  return {
    n,
    blocks,
    distinct,
    leftOut: symbols.length - n * blocks,
    plugInPerSymbol: entropyBits / n,
    correctedPerSymbol:
      (entropyBits + millerMadowTerm({ positions: blocks, contexts: 1, pairs: distinct })) / n,
    ...(cells > MOST_CELLS ? {} : { nsbPerSymbol: nsbEntropyBits(tallies, cells) / n }),
    huffmanPerSymbol: prefixCodeBits(counts) / (n * blocks),
    estimable: blockEstimable(blocks, distinct, entropyBits),
  };
}

function plugInBits({ values, times, total }: Tallies): number {
  let sum = total * log2OfCount(total);
  for (let i = 0; i < values.length; i++) sum -= values[i] * times[i] * log2OfCount(values[i]);
  return Math.max(0, sum / total);
}

function prefixCodeBits(counts: Uint32Array): number {
  const lengths = codeLengths(counts, LONGEST_WORD_BITS);
  let bits = 0;
  for (let i = 0; i < counts.length; i++) if (lengths[i] !== ABSENT) bits += counts[i] * lengths[i];
  return bits;
}
