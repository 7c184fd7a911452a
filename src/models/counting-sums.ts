import type { OperationTally } from './counting-tally.ts';
import type { SymbolSums } from './symbol-sums.ts';

/** Levels of the trees over an alphabet. */
export function levelsOf(alphabetSize: number): number {
  return alphabetSize === 1 ? 0 : 32 - Math.clz32(alphabetSize - 1);
}

/**
 * What the walks of {@link SymbolSums} take, L levels of their trees each: a sum, or a change, L reads; a search L reads and L
 * branches.
 */
export class CountingSums {
  readonly levels: number;
  readonly #alphabetSize: number;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
    this.levels = levelsOf(alphabetSize);
  }

  sum(tally: OperationTally): void {
    tally.tableReads += this.levels;
  }

  search(tally: OperationTally): void {
    tally.tableReads += this.levels;
    tally.branches += this.levels;
  }

  /** Whether the symbol was seen, the walk, its count; one never seen is asked once more and entered in the other tree. */
  increment(sums: SymbolSums, symbol: number, tally: OperationTally): void {
    const isNew = !sums.hasSeen(symbol);
    tally.tableReads += 1 + this.levels + 1 + (isNew ? 1 + this.levels : 0);
    tally.branches += isNew ? 2 : 1;
  }

  /** Each symbol's count, and whether it is 0; those that are not: the count again, and the walk. */
  halve(sums: SymbolSums, tally: OperationTally): void {
    tally.tableReads += this.#alphabetSize;
    tally.branches += this.#alphabetSize;
    for (const count of sums.counts) if (count > 0) tally.tableReads += 1 + this.levels;
  }
}
