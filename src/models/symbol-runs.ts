import { ContextTree, NODE_FIRST, NODE_SECOND, NODE_SYMBOL, NODE_WORDS } from './context-tree.ts';
import type { MemoryBound } from './memory-bound.ts';

/** Set in a node's symbol word when it has two symbols or more, and so a run. */
export const HAS_RUN = 0x20000;

/**
 * Adds one to the count of the entry at `position` of a run; it changes places with the one before when that is smaller.
 * For kernels, which save the node before and add to its sum themselves; elsewhere {@link SymbolRuns.increment}.
 */
export function countEntry(
  pool: Uint32Array,
  run: number,
  position: number,
  symbolBits: number,
): void {
  const entry = (pool[position] + (1 << symbolBits)) >>> 0;
  const before = pool[position - 1];
  if (entry >>> symbolBits > before >>> symbolBits && position - 1 > run) {
    pool[position] = before;
    pool[position - 1] = entry;
  } else {
    pool[position] = entry;
  }
}

const SMALLEST_BLOCK = 4;
const NO_WORDS = new Uint32Array(0);

/** What becomes of a count c when a context is halved. */
export type Halving = 'up' | 'down';

/**
 * The symbols seen in each context, with counts.
 *
 * An entry is `count << symbolBits | symbol`. A context with one symbol keeps its entry in its node; with more, in a run
 * of the pool: the number of entries, then the entries. Runs take blocks of 4, 8, 16 … words and move when full. An entry
 * that is counted moves one place ahead when the one before it has become smaller, so runs stay nearly sorted and
 * the common symbols are found first. The node's second word is the sum of its counts.
 *
 * After {@link mark}, every context that changes is saved once, and {@link restore} brings all of them back: the cost of a
 * reset goes with what changed, not with what there is.
 *
 * Memory: 16 bytes a context and what the tree needs to find it; 4 to 8 bytes a further pair.
 */
export class SymbolRuns {
  readonly tree: ContextTree;
  /** 8 or 16. */
  readonly symbolBits: number;
  /** Largest count an entry holds. */
  readonly largestCount: number;
  /** Replaced when it grows. */
  pool: Uint32Array;

  readonly #halving: Halving;
  readonly #memory: MemoryBound;
  /** Where new blocks come from. Offset 0 stays unused. */
  #poolEnd = SMALLEST_BLOCK;
  /** First free block of SMALLEST_BLOCK << class words; each free block holds the offset of the next. */
  readonly #free = new Uint32Array(20);

  /** Nodes below this are saved before they change. */
  markedNodes = 0;
  #markedPoolEnd = SMALLEST_BLOCK;
  #stamps: Uint32Array = NO_WORDS;
  #stamp = 0;
  #journal: Uint32Array = NO_WORDS;
  #journalLength = 0;

  constructor(
    alphabetSize: number,
    depth: number,
    halving: Halving,
    tree = new ContextTree(alphabetSize, depth),
  ) {
    this.tree = tree;
    this.symbolBits = alphabetSize <= 256 ? 8 : 16;
    this.largestCount = 2 ** (32 - this.symbolBits) - 1;
    this.#halving = halving;
    this.#memory = tree.memory;
    this.pool = this.#memory.grow(NO_WORDS, 256);
  }

  /** A copy that shares nothing; its marked state is the present one when it is marked next. */
  clone(): SymbolRuns {
    const tree = this.tree.clone();
    const copy = new SymbolRuns(tree.alphabetSize, tree.depth, this.#halving, tree);
    copy.pool = copy.#memory.grow(this.pool, this.pool.length);
    copy.#poolEnd = this.#poolEnd;
    copy.#free.set(this.#free);
    return copy;
  }

  /** Words of all runs, with those of blocks left free: what the pool would take. */
  get runWords(): number {
    return this.#poolEnd - SMALLEST_BLOCK;
  }

  /** Distinct symbols of the node. */
  distinct(node: number): number {
    const words = this.tree.words;
    const at = node * NODE_WORDS;
    if (words[at + NODE_SYMBOL] & HAS_RUN) return this.pool[words[at + NODE_FIRST]];
    return words[at + NODE_FIRST] === 0 ? 0 : 1;
  }

  /** Adds a symbol that the node has not, with count 1. */
  append(node: number, symbol: number): void {
    this.save(node);
    const words = this.tree.words;
    const at = node * NODE_WORDS;
    const entry = ((1 << this.symbolBits) | symbol) >>> 0;
    if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
      const first = words[at + NODE_FIRST];
      if (first === 0) {
        words[at + NODE_FIRST] = entry;
      } else {
        const block = this.#takeBlock(0);
        const pool = this.pool;
        pool[block] = 2;
        pool[block + 1] = first;
        pool[block + 2] = entry;
        words[at + NODE_FIRST] = block;
        words[at + NODE_SYMBOL] |= HAS_RUN;
      }
    } else {
      let run = words[at + NODE_FIRST];
      const count = this.pool[run] + 1;
      if (count >= SMALLEST_BLOCK && (count & (count - 1)) === 0) {
        // The block of `count` words, its length word included, is full.
        const block = 31 - Math.clz32(count / SMALLEST_BLOCK);
        const moved = this.#takeBlock(block + 1);
        this.pool.copyWithin(moved, run, run + count);
        this.pool[run] = this.#free[block];
        this.#free[block] = run;
        run = moved;
        words[at + NODE_FIRST] = run;
      }
      this.pool[run] = count;
      this.pool[run + count] = entry;
    }
    words[at + NODE_SECOND]++;
  }

  /** Counts the one symbol of a node without a run. */
  incrementOnly(node: number): void {
    if (node < this.markedNodes) this.save(node);
    const words = this.tree.words;
    const at = node * NODE_WORDS;
    words[at + NODE_FIRST] += 1 << this.symbolBits;
    words[at + NODE_SECOND]++;
    if (words[at + NODE_FIRST] >>> this.symbolBits === this.largestCount) this.halve(node);
  }

  /** Counts the entry at offset `position` of the pool, in the node's run. */
  increment(node: number, position: number): void {
    if (node < this.markedNodes) this.save(node);
    const words = this.tree.words;
    const at = node * NODE_WORDS;
    const count = (this.pool[position] >>> this.symbolBits) + 1;
    words[at + NODE_SECOND]++;
    countEntry(this.pool, words[at + NODE_FIRST], position, this.symbolBits);
    if (count === this.largestCount) this.halve(node);
  }

  /** Halves all counts of the node: c becomes ⌈c/2⌉ or ⌊c/2⌋. */
  halve(node: number): void {
    this.save(node);
    const words = this.tree.words;
    const pool = this.pool;
    const at = node * NODE_WORDS;
    const bits = this.symbolBits;
    const odd = this.#halving === 'up' ? 1 : 0;
    const mask = 2 ** bits - 1;
    if (!(words[at + NODE_SYMBOL] & HAS_RUN)) {
      const entry = words[at + NODE_FIRST];
      const count = ((entry >>> bits) + odd) >>> 1;
      words[at + NODE_FIRST] = ((count << bits) | (entry & mask)) >>> 0;
      words[at + NODE_SECOND] = count;
      return;
    }
    const run = words[at + NODE_FIRST];
    const end = run + pool[run];
    let sum = 0;
    for (let i = run + 1; i <= end; i++) {
      const count = ((pool[i] >>> bits) + odd) >>> 1;
      pool[i] = ((count << bits) | (pool[i] & mask)) >>> 0;
      sum += count;
    }
    words[at + NODE_SECOND] = sum;
  }

  /** Makes the present state the one that {@link restore} returns to. */
  mark(): void {
    this.markedNodes = this.tree.nodeCount;
    this.#markedPoolEnd = this.#poolEnd;
    // A free block of the marked state would have to be saved too; new ones are taken instead.
    this.#free.fill(0);
    this.#stamps = this.#memory.grow(NO_WORDS, this.markedNodes);
    this.#stamp = 1;
    this.#journalLength = 0;
  }

  /** Back to the marked state, contexts aside; cost by what changed since. */
  restore(): void {
    const words = this.tree.words;
    const journal = this.#journal;
    for (let i = 0; i < this.#journalLength; ) {
      const at = journal[i] * NODE_WORDS;
      const symbolWord = journal[i + 1];
      const first = journal[i + 2];
      words[at + NODE_SYMBOL] = symbolWord;
      words[at + NODE_FIRST] = first;
      words[at + NODE_SECOND] = journal[i + 3];
      i += 4;
      if (symbolWord & HAS_RUN) {
        const length = journal[i] + 1;
        for (let j = 0; j < length; j++) this.pool[first + j] = journal[i + j];
        i += length;
      }
    }
    this.#journalLength = 0;
    this.tree.truncate(this.markedNodes);
    this.#poolEnd = this.#markedPoolEnd;
    this.#free.fill(0);
    if (++this.#stamp === 2 ** 32) {
      this.#stamps.fill(0);
      this.#stamp = 1;
    }
  }

  /** Keeps a node as it was marked, once, before it changes. */
  save(node: number): void {
    if (node >= this.markedNodes || this.#stamps[node] === this.#stamp) return;
    this.#stamps[node] = this.#stamp;
    const words = this.tree.words;
    const at = node * NODE_WORDS;
    const first = words[at + NODE_FIRST];
    const hasRun = (words[at + NODE_SYMBOL] & HAS_RUN) !== 0;
    const runLength = hasRun ? this.pool[first] + 1 : 0;
    const needed = this.#journalLength + 4 + runLength;
    if (needed > this.#journal.length) {
      this.#journal = this.#memory.grow(this.#journal, Math.max(256, 2 * needed));
    }
    const journal = this.#journal;
    let to = this.#journalLength;
    journal[to++] = node;
    journal[to++] = words[at + NODE_SYMBOL];
    journal[to++] = first;
    journal[to++] = words[at + NODE_SECOND];
    for (let i = 0; i < runLength; i++) journal[to++] = this.pool[first + i];
    this.#journalLength = to;
  }

  /** Offset of a block of SMALLEST_BLOCK << size words. */
  #takeBlock(size: number): number {
    const free = this.#free[size];
    if (free !== 0) {
      this.#free[size] = this.pool[free];
      return free;
    }
    const block = this.#poolEnd;
    const end = block + (SMALLEST_BLOCK << size);
    if (end > this.pool.length) {
      const length = this.pool.length;
      const more = length < 2 ** 25 ? length : Math.floor(length / 2);
      this.pool = this.#memory.grow(this.pool, Math.max(end, length + more));
    }
    this.#poolEnd = end;
    return block;
  }
}
