import type { ContextScope } from '../models/context-counts.ts';
import { rankSymbols } from '../models/context-counts-ranks.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';

/** Most cells of a table of pairs by windows: 64 MiB. */
const MOST_CELLS = 2 ** 24;

/** How often each pair of context and symbol occurs in each contiguous window of a sequence. */
export interface WindowCounts {
  /** Symbols of a context: 0 or 1. */
  readonly order: 0 | 1;
  readonly windows: number;
  readonly contexts: number;
  readonly pairs: number;
  /** Shape [pairs × windows], by pair. */
  readonly pairCounts: Uint32Array;
  /** Shape [contexts × windows], by context. */
  readonly contextCounts: Uint32Array;
  /** Context of each pair. */
  readonly contextOf: Uint32Array;
  /** Positions counted in each window. */
  readonly positions: Float64Array;
}

/** Where window `window` of `windows` begins among `symbolCount` symbols. */
export function windowStart(symbolCount: number, windows: number, window: number): number {
  return Math.floor((window * symbolCount) / windows);
}

/**
 * Counts by window, or why not: a table of all possible pairs that would pass 64 MiB is not made.
 * @param contexts  whether a message's first symbol has a predecessor; a position lies in the window of its symbol
 * Cost: one pass over the symbols; at most 64 MiB.
 */
export function countByWindow(
  sequence: SymbolSequence,
  order: 0 | 1,
  windows: number,
  contexts: ContextScope,
): WindowCounts | string {
  const { symbols } = sequence;
  const { rankOf, distinct, symbols: ranked } = rankSymbols(symbols);
  const possible = distinct ** (order + 1);
  if (possible * windows > MOST_CELLS) {
    return `${distinct} different symbols are too many to compare windows at order ${order}`;
  }
  const ends = contexts === 'message' ? sequence.messageEnds : Uint32Array.of(symbols.length);
  const counts = new Uint32Array(possible * windows);
  let window = 0;
  let windowEnd = windowStart(symbols.length, windows, 1);
  let from = 0;
  for (let m = 0; m < ends.length; m++) {
    const to = ends[m];
    let context = 0;
    for (let i = from; i < to; i++) {
      while (i >= windowEnd) windowEnd = windowStart(symbols.length, windows, ++window + 1);
      const symbol = rankOf === undefined ? ranked[i] : rankOf[ranked[i]];
      if (i >= from + order) counts[(context * distinct + symbol) * windows + window]++;
      if (order === 1) context = symbol;
    }
    from = to;
  }
  return compact(counts, order, distinct, windows);
}

/** Leaves out the pairs that never occur; the rows that do move to the front of `counts`. */
function compact(
  counts: Uint32Array,
  order: 0 | 1,
  distinct: number,
  windows: number,
): WindowCounts {
  const possible = counts.length / windows;
  const possibleContexts = possible / distinct;
  const contextRows = new Uint32Array(possibleContexts * windows);
  const contextOf: number[] = [];
  const positions = new Float64Array(windows);
  let contexts = 0;
  let pairs = 0;
  for (let context = 0; context < possibleContexts; context++) {
    let seen = false;
    for (let row = context * distinct; row < (context + 1) * distinct; row++) {
      let sum = 0;
      for (let w = 0; w < windows; w++) sum += counts[row * windows + w];
      if (sum === 0) continue;
      seen = true;
      for (let w = 0; w < windows; w++) {
        const count = counts[row * windows + w];
        counts[pairs * windows + w] = count;
        contextRows[contexts * windows + w] += count;
        positions[w] += count;
      }
      contextOf.push(contexts);
      pairs++;
    }
    if (seen) contexts++;
  }
  return {
    order,
    windows,
    contexts,
    pairs,
    pairCounts: counts.subarray(0, pairs * windows),
    contextCounts: contextRows.subarray(0, contexts * windows),
    contextOf: Uint32Array.from(contextOf),
    positions,
  };
}

/** A run of windows taken as one sample. Code lengths in bits. */
export interface SegmentLength {
  readonly positions: number;
  /** Under the segment's own frequencies: too low by about (pairs − contexts) ÷ (2 ln 2). */
  readonly ownBits: number;
  /** Under the frequencies of all windows. */
  readonly underAllBits: number;
  readonly contexts: number;
  readonly pairs: number;
}

/**
 * Code lengths of segments under their own frequencies and under those of all windows.
 * @param bounds  shape [segments + 1], rising from 0 to the number of windows
 */
export function segmentLengths(counts: WindowCounts, bounds: readonly number[]): SegmentLength[] {
  const { windows } = counts;
  const segments = bounds.length - 1;
  const positions = new Float64Array(segments);
  const own = new Float64Array(segments);
  const underAll = new Float64Array(segments);
  const contexts = new Float64Array(segments);
  const pairs = new Float64Array(segments);
  const contextLogs = new Float64Array(counts.contexts);
  for (let c = 0; c < counts.contexts; c++) {
    let all = 0;
    for (let s = 0; s < segments; s++) {
      const count = sumOf(counts.contextCounts, c * windows, bounds[s], bounds[s + 1]);
      all += count;
      if (count === 0) continue;
      contexts[s]++;
      positions[s] += count;
      own[s] += count * Math.log2(count);
    }
    contextLogs[c] = Math.log2(all);
  }
  const found = new Float64Array(segments);
  for (let p = 0; p < counts.pairs; p++) {
    let all = 0;
    for (let s = 0; s < segments; s++) {
      found[s] = sumOf(counts.pairCounts, p * windows, bounds[s], bounds[s + 1]);
      all += found[s];
    }
    const length = contextLogs[counts.contextOf[p]] - Math.log2(all);
    for (let s = 0; s < segments; s++) {
      if (found[s] === 0) continue;
      pairs[s]++;
      own[s] -= found[s] * Math.log2(found[s]);
      underAll[s] += found[s] * length;
    }
  }
  return Array.from({ length: segments }, (_, s) => ({
    positions: positions[s],
    ownBits: Math.max(0, own[s]),
    underAllBits: underAll[s],
    contexts: contexts[s],
    pairs: pairs[s],
  }));
}

function sumOf(values: Uint32Array, row: number, from: number, to: number): number {
  let sum = 0;
  for (let i = row + from; i < row + to; i++) sum += values[i];
  return sum;
}
