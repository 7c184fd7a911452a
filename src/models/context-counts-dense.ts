import type { SymbolArray } from '../symbols/sequence.ts';
import type { CountingBlocks } from './context-counts-blocks.ts';
import type { RankedSymbols } from './context-counts-ranks.ts';
import { log2OfCount, type Tallies, TallyBuilder } from './context-counts-tallies.ts';

/** What counting one order gives, whichever way it was counted. */
export interface CountedOrder {
  readonly contextTallies: Tallies;
  readonly pairTallies: Tallies;
  /** Σ −log2(pair count ÷ context count) over the positions of each block. */
  readonly blockBits: Float64Array;
}

/**
 * Counts the pairs of one order in a table with a cell for every possible pair.
 *
 * The index of a context rolls: it drops its oldest symbol and takes the newest, so a position costs two look-ups.
 * @param ends   where contexts begin anew
 * @param order  k; distinct^(k + 1) must be at most 2^24
 */
export function countDense(
  ranked: RankedSymbols,
  ends: Uint32Array,
  order: number,
  blocks: CountingBlocks,
): CountedOrder {
  const { symbols, distinct } = ranked;
  const rankOf = ranked.rankOf ?? Uint32Array.from({ length: distinct }, (_, i) => i);
  const contextCells = distinct ** order;
  const counts = new Uint32Array(contextCells * distinct);
  countPairs(symbols, rankOf, ends, order, distinct, counts);
  const contexts = new TallyBuilder();
  const pairs = new TallyBuilder();
  // A cell's count is no longer needed once its code length is known: the length takes its place.
  const lengths = new Float32Array(counts.buffer);
  for (let row = 0; row < counts.length; row += distinct) {
    let contextCount = 0;
    for (let cell = row; cell < row + distinct; cell++) contextCount += counts[cell];
    if (contextCount === 0) continue;
    contexts.add(contextCount);
    const contextLog = log2OfCount(contextCount);
    for (let cell = row; cell < row + distinct; cell++) {
      const count = counts[cell];
      if (count === 0) continue;
      pairs.add(count);
      lengths[cell] = contextLog - log2OfCount(count);
    }
  }
  const blockBits = new Float64Array(blocks.count);
  sumLengths(symbols, rankOf, ends, order, distinct, lengths, blocks.ends, blockBits);
  return { contextTallies: contexts.finish(), pairTallies: pairs.finish(), blockBits };
}

function countPairs(
  symbols: SymbolArray,
  rankOf: Uint32Array,
  ends: Uint32Array,
  order: number,
  distinct: number,
  counts: Uint32Array,
): void {
  const oldest = distinct ** order;
  let from = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m];
    if (to - from > order) {
      let context = 0;
      for (let i = from; i < from + order; i++) context = context * distinct + rankOf[symbols[i]];
      for (let i = from + order; i < to; i++) {
        const pair = context * distinct + rankOf[symbols[i]];
        counts[pair]++;
        context = pair - rankOf[symbols[i - order]] * oldest;
      }
    }
    from = to;
  }
}

function sumLengths(
  symbols: SymbolArray,
  rankOf: Uint32Array,
  ends: Uint32Array,
  order: number,
  distinct: number,
  lengths: Float32Array,
  blockEnds: Uint32Array,
  blockBits: Float64Array,
): void {
  const oldest = distinct ** order;
  let from = 0;
  let block = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m];
    if (to - from > order) {
      let context = 0;
      for (let i = from; i < from + order; i++) context = context * distinct + rankOf[symbols[i]];
      let i = from + order;
      while (i < to) {
        while (blockEnds[block] <= i - order) block++;
        const stop = Math.min(to, blockEnds[block] + order);
        let bits = 0;
        for (; i < stop; i++) {
          const pair = context * distinct + rankOf[symbols[i]];
          bits += lengths[pair];
          context = pair - rankOf[symbols[i - order]] * oldest;
        }
        blockBits[block] += bits;
      }
    }
    from = to;
  }
}
