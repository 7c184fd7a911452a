import type { SymbolArray } from '../symbols/sequence.ts';
import { suffixArray } from './suffix-array.ts';

/** All suffixes of a sequence in rising order, and what neighbours share. */
export interface SortedSuffixes {
  /** Shape [n]: start positions, least suffix first. */
  readonly order: Int32Array;
  /** Shape [n], by position: symbols that the suffix shares with the one just before it in `order`; 0 for the first. */
  readonly common: Int32Array;
}

/** Marks that no suffix comes before. */
const NO_SUFFIX = -1;

/** Cost: linear time; 8 bytes a symbol, and up to about 12 more while it is made. */
export function sortedSuffixes(symbols: SymbolArray): SortedSuffixes {
  const order = suffixArray(symbols);
  return { order, common: commonLengths(symbols, order) };
}

/**
 * Source: J. Kärkkäinen, G. Manzini, S. J. Puglisi, "Permuted Longest-Common-Prefix Array", 2009.
 */
function commonLengths(symbols: SymbolArray, order: Int32Array): Int32Array {
  const { length: n } = symbols;
  const common = new Int32Array(n);
  // Until a position's length is known, its place names the suffix before it.
  for (let j = 0; j < n; j++) common[order[j]] = j === 0 ? NO_SUFFIX : order[j - 1];
  let shared = 0;
  for (let i = 0; i < n; i++) {
    const other = common[i];
    if (other === NO_SUFFIX) shared = 0;
    else {
      const most = n - Math.max(i, other);
      while (shared < most && symbols[i + shared] === symbols[other + shared]) shared++;
    }
    common[i] = shared;
    if (shared > 0) shared--;
  }
  return common;
}
