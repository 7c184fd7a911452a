import { BugError } from '../errors/errors.ts';
import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import type { ContextScope, OrderCounts } from './context-counts.ts';
import { type CountingBlocks, positionsByBlock } from './context-counts-blocks.ts';
import { log2OfCount, type Tallies, TallyBuilder } from './context-counts-tallies.ts';
import { countedBits, startContextBits } from './empirical-length.ts';
import { PairTree } from './pair-tree.ts';

/** Highest order that is counted in pieces: its table has a cell for every possible pair. */
const HIGHEST_STREAMED_ORDER = 2;
/** 64 MiB. */
const MOST_CELLS = 2 ** 24;

/** The highest order whose table of `distinct` symbols is small enough to count in pieces; −1 where none is. */
export function highestStreamedOrder(distinct: number): number {
  let order = HIGHEST_STREAMED_ORDER;
  while (order >= 0 && distinct ** (order + 1) > MOST_CELLS) order--;
  return order;
}

export interface StreamedCountsOptions {
  readonly alphabetSize: number;
  /** Which symbols there are: those whose entry is not 0. */
  readonly symbolCounts: Float64Array;
  /** At most {@link highestStreamedOrder}. */
  readonly upto: number;
  readonly contexts: ContextScope;
  /** Of the whole; where contexts begin anew under `message`. */
  readonly messageEnds: Uint32Array;
  readonly symbolCount: number;
  readonly blocks: CountingBlocks;
}

/** One order while it is counted. */
interface CountedTable {
  readonly order: number;
  readonly counts: Uint32Array;
  /** The same memory once code lengths stand in it. */
  lengths: Float32Array;
  contextTallies: Tallies | undefined;
  pairTallies: Tallies | undefined;
  readonly blockBits: Float64Array;
  block: number;
  bits: number;
}

/**
 * What `countContexts` counts of a sequence, from chunks: {@link count} for each chunk, then {@link settle}, then
 * {@link spread} for each chunk once more, then {@link finish}. Counts are equal; bits of blocks are added in the same order.
 */
export class StreamedCounts {
  readonly #options: StreamedCountsOptions;
  readonly #rankOf: Uint32Array;
  readonly #distinct: number;
  readonly #tables: CountedTable[] = [];
  /** Contexts that hold start values, by order from 1; see empirical-length.ts. */
  readonly #starts: PairTree[] = [];
  /** Ranks of the last two symbols, and how many of the segment are behind. */
  #last = 0;
  #beforeLast = 0;
  #behind = 0;
  #at = 0;

  constructor(options: StreamedCountsOptions) {
    this.#options = options;
    this.#rankOf = new Uint32Array(options.alphabetSize);
    let distinct = 0;
    options.symbolCounts.forEach((count, symbol) => {
      if (count > 0) this.#rankOf[symbol] = distinct++;
    });
    this.#distinct = distinct;
    if (options.upto > highestStreamedOrder(distinct))
      throw new BugError('an order was to be counted in pieces whose table is too large');
    for (let order = 0; order <= options.upto; order++) {
      const counts = new Uint32Array(distinct ** (order + 1));
      this.#tables.push({
        order,
        counts,
        lengths: new Float32Array(counts.buffer),
        contextTallies: undefined,
        pairTallies: undefined,
        blockBits: new Float64Array(options.blocks.count),
        block: 0,
        bits: 0,
      });
      if (order > 0) this.#starts.push(new PairTree(options.alphabetSize, order));
    }
  }

  /** First pass. */
  count(chunk: SymbolChunk): void {
    this.#eachPiece(
      chunk,
      (symbols, from, to) => this.#countPiece(symbols, from, to),
      () => {
        for (const pairs of this.#starts) pairs.start();
      },
    );
  }

  /** Between the passes. */
  settle(): void {
    for (const table of this.#tables) settleTable(table, this.#distinct);
    this.#behind = 0;
    this.#at = 0;
  }

  /** Second pass. */
  spread(chunk: SymbolChunk): void {
    this.#eachPiece(
      chunk,
      (symbols, from, to) => this.#spreadPiece(symbols, from, to),
      () => {
        for (const table of this.#tables) flush(table);
      },
    );
  }

  /** Shape [upto + 1], by order. */
  finish(): OrderCounts[] {
    const { contexts, messageEnds, symbolCount, blocks } = this.#options;
    const ends = contexts === 'message' ? messageEnds : Uint32Array.of(symbolCount);
    return this.#tables.map((table) => {
      flush(table);
      const contextTallies = table.contextTallies!;
      const pairTallies = table.pairTallies!;
      return {
        order: table.order,
        positions: pairTallies.total,
        contexts: contextTallies.distinct,
        pairs: pairTallies.distinct,
        contextTallies,
        pairTallies,
        blockBits: table.blockBits,
        blockPositions: positionsByBlock(ends, table.order, blocks),
      };
    });
  }

  /** What `empiricalLengthBits` gives; from {@link settle} on. */
  fitBits(order: number): number {
    const { contextTallies, pairTallies } = this.#tables[order];
    const counted = countedBits({
      contextTallies: contextTallies!,
      pairTallies: pairTallies!,
    });
    return counted + (order === 0 ? 0 : startContextBits(this.#starts[order - 1], order));
  }

  #eachPiece(
    { symbols, messageEnds }: SymbolChunk,
    piece: (symbols: SymbolArray, from: number, to: number) => void,
    end: () => void,
  ): void {
    if (this.#options.contexts === 'running') {
      piece(symbols, 0, symbols.length);
      this.#at += symbols.length;
      return;
    }
    let from = 0;
    for (const to of messageEnds) {
      piece(symbols, from, to);
      end();
      this.#at += to - from;
      this.#behind = 0;
      from = to;
    }
    piece(symbols, from, symbols.length);
    this.#at += symbols.length - from;
  }

  #countPiece(symbols: SymbolArray, from: number, to: number): void {
    const rankOf = this.#rankOf;
    const distinct = this.#distinct;
    const [zero, one, two] = this.#tables;
    let last = this.#last;
    let beforeLast = this.#beforeLast;
    let i = from;
    for (; i < to && this.#behind < HIGHEST_STREAMED_ORDER; i++, this.#behind++) {
      const rank = rankOf[symbols[i]];
      zero.counts[rank]++;
      if (one !== undefined && this.#behind === 1) one.counts[last * distinct + rank]++;
      for (const pairs of this.#starts)
        if (this.#behind < pairs.order) pairs.count(symbols, i, i + 1);
      beforeLast = last;
      last = rank;
    }
    const counts0 = zero.counts;
    if (two !== undefined) {
      const counts1 = one.counts;
      const counts2 = two.counts;
      for (; i < to; i++) {
        const rank = rankOf[symbols[i]];
        const pair = last * distinct + rank;
        counts0[rank]++;
        counts1[pair]++;
        counts2[beforeLast * distinct * distinct + pair]++;
        beforeLast = last;
        last = rank;
      }
    } else if (one !== undefined) {
      const counts1 = one.counts;
      for (; i < to; i++) {
        const rank = rankOf[symbols[i]];
        counts0[rank]++;
        counts1[last * distinct + rank]++;
        beforeLast = last;
        last = rank;
      }
    } else {
      for (; i < to; i++) counts0[rankOf[symbols[i]]]++;
    }
    this.#last = last;
    this.#beforeLast = beforeLast;
  }

  #spreadPiece(symbols: SymbolArray, from: number, to: number): void {
    const rankOf = this.#rankOf;
    const distinct = this.#distinct;
    const { ends } = this.#options.blocks;
    const startLast = this.#last;
    const startBeforeLast = this.#beforeLast;
    for (const table of this.#tables) {
      const { order, lengths } = table;
      let last = startLast;
      let beforeLast = startBeforeLast;
      let i = from;
      for (let behind = this.#behind; i < to && behind < order; i++, behind++) {
        beforeLast = last;
        last = rankOf[symbols[i]];
      }
      let context = order === 2 ? beforeLast * distinct + last : order === 1 ? last : 0;
      while (i < to) {
        const first = this.#at + (i - from) - order;
        while (ends[table.block] <= first) {
          flush(table);
          table.block++;
        }
        const stop = Math.min(to, i + (ends[table.block] - first));
        let { bits } = table;
        for (; i < stop; i++) {
          const rank = rankOf[symbols[i]];
          bits += lengths[context * distinct + rank];
          context = order === 2 ? last * distinct + rank : order === 1 ? rank : 0;
          last = rank;
        }
        table.bits = bits;
      }
    }
    for (let i = Math.max(from, to - 2); i < to; i++) {
      this.#beforeLast = this.#last;
      this.#last = rankOf[symbols[i]];
    }
    this.#behind = Math.min(HIGHEST_STREAMED_ORDER, this.#behind + to - from);
  }
}

/** Makes tallies of an order's counts, and puts the code length of each pair in the place of its count. */
function settleTable(table: CountedTable, distinct: number): void {
  const { counts, lengths } = table;
  const contexts = new TallyBuilder();
  const pairs = new TallyBuilder();
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
  table.contextTallies = contexts.finish();
  table.pairTallies = pairs.finish();
}

/** Ends a run of positions of one block. */
function flush(table: CountedTable): void {
  table.blockBits[table.block] += table.bits;
  table.bits = 0;
}
