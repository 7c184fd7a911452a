import { NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import type { OperationTally } from './counting-tally.ts';
import { HAS_RUN, type SymbolRuns } from './symbol-runs.ts';

/** Words of the smallest block. */
const SMALLEST_BLOCK = 4;

/**
 * Changes the counts of contexts as {@link SymbolRuns} does, and counts what that takes, the same at both ends: every word of
 * a node or run that is read, twice where it is read twice, and every test. What marks a state to return to is none of it.
 *
 * - Counting a lone symbol: entry, sum and entry again, 3 reads; whether its count is full, 1 branch.
 * - Counting one in a run: entry, sum, place of the run, entry and the one before, 5 reads; whether it is now the greater of the
 *   two, and if so whether the other is an entry at all; whether its count is full.
 * - Adding a symbol: whether there is a run, 1 read and 1 branch. Without one: the entry and whether there is any, 1 and 1; a
 *   second symbol takes a block (1 read and 1 branch: whether one is free, which is read then) and reads the node's word. With one: its place and
 *   length, 2 reads, and whether the block is full: 1 branch, from 4 words on 2; a full one is copied, 1 read a word, besides 2
 *   reads and 1 branch for taking a block and leaving one. In the end the sum, 1 read.
 * - Halving: whether there is a run, 1 and 1; a lone symbol's entry, 1 read; a run's place and length, 2 reads, then for each entry 2 reads
 *   and 1 branch, and 1 branch for the end.
 */
export class CountingRuns {
  readonly runs: SymbolRuns;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;

  constructor(runs: SymbolRuns, encoder: OperationTally, decoder: OperationTally) {
    this.runs = runs;
    this.#encoder = encoder;
    this.#decoder = decoder;
  }

  #count(tableReads: number, branches: number): void {
    this.#encoder.tableReads += tableReads;
    this.#encoder.branches += branches;
    this.#decoder.tableReads += tableReads;
    this.#decoder.branches += branches;
  }

  incrementOnly(node: number): void {
    const { runs } = this;
    this.#count(3, 1);
    const entry = runs.tree.words[node * NODE_WORDS + NODE_FIRST];
    // The halving of its own, before the model asks for one.
    if ((entry >>> runs.symbolBits) + 1 === runs.largestCount) this.#countHalving(node);
    runs.incrementOnly(node);
  }

  increment(node: number, position: number): void {
    const { runs } = this;
    const { pool, symbolBits } = runs;
    const count = (pool[position] >>> symbolBits) + 1;
    this.#count(5, count > pool[position - 1] >>> symbolBits ? 3 : 2);
    if (count === runs.largestCount) this.#countHalving(node);
    runs.increment(node, position);
  }

  append(node: number, symbol: number): void {
    const { runs } = this;
    const words = runs.tree.words;
    const at = node * NODE_WORDS;
    let takesBlock: boolean;
    if (words[at + NODE_SYMBOL] & HAS_RUN) {
      const count = runs.pool[words[at + NODE_FIRST]] + 1;
      takesBlock = count >= SMALLEST_BLOCK && (count & (count - 1)) === 0;
      this.#count(1 + 2 + 1, 1 + (count >= SMALLEST_BLOCK ? 2 : 1));
      if (takesBlock) this.#count(count + 2, 1);
    } else {
      takesBlock = words[at + NODE_FIRST] !== 0;
      this.#count(1 + 1 + 1, 1 + 1);
      if (takesBlock) this.#count(1 + 1, 1);
    }
    const { runWords } = runs;
    runs.append(node, symbol);
    // Where the pool did not grow, a free block was taken, which names the next.
    if (takesBlock && runs.runWords === runWords) this.#count(1, 0);
  }

  halve(node: number): void {
    this.#countHalving(node);
    this.runs.halve(node);
  }

  #countHalving(node: number): void {
    const words = this.runs.tree.words;
    const at = node * NODE_WORDS;
    if (words[at + NODE_SYMBOL] & HAS_RUN) {
      const distinct = this.runs.pool[words[at + NODE_FIRST]];
      this.#count(1 + 2 + 2 * distinct, 1 + distinct + 1);
    } else {
      this.#count(1 + 1, 1);
    }
  }

  /** Whether there is a run; its place and length, or the entry and whether there is any. */
  distinct(node: number): number {
    const { words } = this.runs.tree;
    if (words[node * NODE_WORDS + NODE_SYMBOL] & HAS_RUN) this.#count(3, 1);
    else this.#count(2, 2);
    return this.runs.distinct(node);
  }

  /** Reads the sum of a node's counts. */
  sumOf(node: number): number {
    this.#count(1, 0);
    return this.runs.tree.words[node * NODE_WORDS + NODE_SECOND];
  }
}
