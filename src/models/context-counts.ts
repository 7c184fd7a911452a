import { BugError, InputError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import { type CountingBlocks, countingBlocks, positionsByBlock } from './context-counts-blocks.ts';
import { type CountedOrder, countDense } from './context-counts-dense.ts';
import {
  COUNTING_MEMORY_BYTES,
  checkCountingMemory,
  countsDensely,
} from './context-counts-memory.ts';
import { rankSymbols } from './context-counts-ranks.ts';
import { countSorted, type SortedWindows, sortWindows } from './context-counts-sorted.ts';
import type { Tallies } from './context-counts-tallies.ts';

/** Where the predecessors of a position must lie: in its own message, or anywhere before it. */
export type ContextScope = 'message' | 'running';

/** Exact counts of the order-k contexts of a sequence and of the symbols after them. */
export interface OrderCounts {
  /** k ≥ 0: symbols of a context. */
  readonly order: number;
  /** N: positions with k predecessors. The others are never counted. */
  readonly positions: number;
  /** C: distinct contexts at those positions. */
  readonly contexts: number;
  /** P: distinct pairs of context and symbol. */
  readonly pairs: number;
  readonly contextTallies: Tallies;
  readonly pairTallies: Tallies;
  /** Σ −log2(pair count ÷ context count) over the positions of each contiguous block, in bits, to about 7 digits. */
  readonly blockBits: Float64Array;
  /** Positions of each block; Σ = N. */
  readonly blockPositions: Float64Array;
}

export interface CountingOptions {
  /** Highest order, 0 … {@link HIGHEST_COUNTED_ORDER}. */
  readonly upto: number;
  readonly contexts: ContextScope;
  /** Where contexts that run on over messages begin anew all the same: the index one past each stretch's last symbol. */
  readonly breaks?: Uint32Array;
  /** Contiguous blocks of one length, 1 … 256, or where each ends; 64 when absent. */
  readonly blocks?: number | Uint32Array;
  /** Memory for the sequence and its counting together, in bytes; {@link COUNTING_MEMORY_BYTES} when absent. */
  readonly memoryBytes?: number;
  /** Called after each order. */
  readonly progress?: (done: number, total: number) => void;
}

export const HIGHEST_COUNTED_ORDER = 32;

const LARGEST_CACHED_CELLS = 2 ** 20;

/** Most blocks: a block's number is kept in one byte a symbol. */
export const MOST_COUNTED_BLOCKS = 256;

/**
 * Counts contexts and pairs of orders 0 … `upto`, exactly.
 *
 * Orders whose table of all possible pairs is small are counted in it; for the others all windows of upto + 1 symbols
 * are sorted once, and each order is one pass over the sorted windows.
 * @returns shape [upto + 1], by order; an order without positions has N = C = P = 0
 * @throws InputError for an order or block count out of range; LimitError where memory would not suffice
 * Cost: O(n · upto) time; memory 64 MiB at most for tables, 12 to 17 bytes a symbol where windows are sorted.
 */
export function countContexts(sequence: SymbolSequence, options: CountingOptions): OrderCounts[] {
  const { symbols } = sequence;
  const { upto, contexts, progress } = options;
  checkRange('the highest order', upto, 0, HIGHEST_COUNTED_ORDER);
  const ends =
    contexts === 'message'
      ? sequence.messageEnds
      : (options.breaks ?? Uint32Array.of(symbols.length));
  const ranked = rankSymbols(symbols);
  const { distinct } = ranked;
  checkCountingMemory({
    symbolCount: symbols.length,
    symbolBytes: symbols.BYTES_PER_ELEMENT,
    distinct,
    upto,
    memoryBytes: options.memoryBytes ?? COUNTING_MEMORY_BYTES,
  });
  const blocks = blocksOf(options.blocks ?? 64, symbols.length);
  const sorts = !countsDensely(symbols.length, distinct, upto);
  let windows: SortedWindows | undefined;
  const orders: OrderCounts[] = [];
  for (let order = 0; order <= upto; order++) {
    let counted: CountedOrder;
    // Windows once sorted are read faster than a table too large for the processor's caches is filled.
    const dense =
      countsDensely(symbols.length, distinct, order) &&
      !(sorts && distinct ** (order + 1) > LARGEST_CACHED_CELLS);
    if (dense) {
      counted = countDense(ranked, ends, order, blocks);
    } else {
      windows ??= sortWindows(
        ranked,
        ends,
        upto + 1,
        blocks,
        expectedLead(orders, symbols.length, upto + 1),
      );
      counted = countSorted(windows, order, blocks);
    }
    orders.push({
      order,
      positions: counted.pairTallies.total,
      contexts: counted.contextTallies.distinct,
      pairs: counted.pairTallies.distinct,
      ...counted,
      blockPositions: positionsByBlock(ends, order, blocks),
    });
    progress?.(order + 1, upto + 1);
  }
  return orders;
}

/**
 * Symbols after which hardly two windows should agree: by the entropies counted so far, they carry 16 times as many cases as
 * there are windows. The whole width where that is more.
 */
function expectedLead(orders: readonly OrderCounts[], symbolCount: number, width: number): number {
  const wanted = Math.log2(symbolCount) + 4;
  let bits = 0;
  for (let lead = 1; lead < width; lead++) {
    const counted = orders[Math.min(lead, orders.length) - 1];
    if (counted === undefined || counted.positions === 0) return width;
    bits += counted.blockBits.reduce((a, b) => a + b, 0) / counted.positions;
    if (bits >= wanted) return lead;
  }
  return width;
}

function blocksOf(blocks: number | Uint32Array, symbolCount: number): CountingBlocks {
  const count = typeof blocks === 'number' ? blocks : blocks.length;
  checkRange('the number of blocks', count, 1, MOST_COUNTED_BLOCKS);
  if (typeof blocks === 'number') return countingBlocks(symbolCount, blocks);
  for (let b = 1; b < count; b++) {
    if (blocks[b] < blocks[b - 1]) throw new BugError('the ends of counting blocks fall');
  }
  if (blocks[count - 1] !== symbolCount)
    throw new BugError('counting blocks do not end with the data');
  return { count, ends: blocks };
}

function checkRange(what: string, value: number, least: number, most: number): void {
  if (Number.isInteger(value) && value >= least && value <= most) return;
  throw new InputError(`${what} is not allowed`, {
    expected: `an integer from ${least} to ${most}`,
    got: String(value),
  });
}
