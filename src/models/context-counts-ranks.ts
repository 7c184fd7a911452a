import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';

/** Symbols renumbered without gaps: the ranks of the distinct ones, so that tables are no larger than the data needs. */
export interface RankedSymbols {
  readonly symbols: SymbolArray;
  /** `rankOf[symbol]` is its rank; absent where `symbols` are ranks already. */
  readonly rankOf: Uint32Array | undefined;
  readonly distinct: number;
}

/** Largest symbol for which a look-up table is kept: 64 MiB of it. */
const LARGEST_LOOKED_UP = 2 ** 24;

/** Ranks of the symbols seen. Cost: O(n + largest symbol), or O(n log n) where symbols reach 2^24 and more. */
export function rankSymbols(symbols: SymbolArray): RankedSymbols {
  let largest = 0;
  for (let i = 0; i < symbols.length; i++) if (symbols[i] > largest) largest = symbols[i];
  if (largest >= LARGEST_LOOKED_UP) return rankBySorting(symbols);
  const rankOf = new Uint32Array(symbols.length === 0 ? 0 : largest + 1);
  for (let i = 0; i < symbols.length; i++) rankOf[symbols[i]] = 1;
  let distinct = 0;
  for (let s = 0; s < rankOf.length; s++) if (rankOf[s] === 1) rankOf[s] = distinct++;
  return { symbols, rankOf, distinct };
}

function rankBySorting(symbols: SymbolArray): RankedSymbols {
  const sorted = symbols.slice().sort();
  let distinct = 0;
  for (let i = 0; i < sorted.length; i++) {
    if (i === 0 || sorted[i] !== sorted[i - 1]) sorted[distinct++] = sorted[i];
  }
  const ranks = newSymbolArray(distinct, symbols.length);
  for (let i = 0; i < symbols.length; i++) {
    let low = 0;
    for (let high = distinct; high - low > 1; ) {
      const middle = (low + high) >>> 1;
      if (sorted[middle] <= symbols[i]) low = middle;
      else high = middle;
    }
    ranks[i] = low;
  }
  return { symbols: ranks, rankOf: undefined, distinct };
}

/** The ranks themselves, followed by `padding` zeros. */
export function copyOfRanks(ranked: RankedSymbols, padding: number): SymbolArray {
  const { symbols, rankOf, distinct } = ranked;
  const ranks = newSymbolArray(distinct, symbols.length + padding);
  if (rankOf === undefined) ranks.set(symbols);
  else for (let i = 0; i < symbols.length; i++) ranks[i] = rankOf[symbols[i]];
  return ranks;
}
