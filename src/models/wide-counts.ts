import type { Halving } from './symbol-runs.ts';

/**
 * Counts of one context over a large alphabet, with sums found in O(log m) steps: the empty context of alphabets above
 * 256, where a run of thousands of symbols would be walked for every symbol.
 *
 * Two Fenwick trees, over the counts and over "seen at all". After {@link mark}, {@link restore} brings back the marked
 * counts at a cost that goes with the symbols that changed.
 *
 * Memory: 16 bytes a symbol of the alphabet, 8 more once marked.
 * Source: P. M. Fenwick, Software: Practice and Experience 24(3), 1994.
 */
export class WideCounts {
  readonly alphabetSize: number;
  readonly counts: Uint32Array;
  /** Sum of the counts. */
  sum = 0;
  /** Symbols with a count, or that had one before a halving. */
  distinct = 0;

  readonly #halving: Halving;
  readonly #seen: Uint8Array;
  readonly #countTree: Int32Array;
  readonly #seenTree: Int32Array;
  readonly #size: number;

  #marked = false;
  #markedCounts = new Uint32Array(0);
  #markedSeen = new Uint8Array(0);
  #changed = new Uint32Array(0);
  #changedCount = 0;
  readonly #isChanged: Uint8Array;

  constructor(alphabetSize: number, halving: Halving) {
    this.alphabetSize = alphabetSize;
    this.#halving = halving;
    this.counts = new Uint32Array(alphabetSize);
    this.#seen = new Uint8Array(alphabetSize);
    this.#isChanged = new Uint8Array(alphabetSize);
    let size = 1;
    while (size < alphabetSize) size *= 2;
    this.#size = size;
    this.#countTree = new Int32Array(size + 1);
    this.#seenTree = new Int32Array(size + 1);
  }

  clone(): WideCounts {
    const copy = new WideCounts(this.alphabetSize, this.#halving);
    copy.counts.set(this.counts);
    copy.#seen.set(this.#seen);
    copy.#countTree.set(this.#countTree);
    copy.#seenTree.set(this.#seenTree);
    copy.sum = this.sum;
    copy.distinct = this.distinct;
    return copy;
  }

  hasSeen(symbol: number): boolean {
    return this.#seen[symbol] === 1;
  }

  /** Sum of the counts of all smaller symbols. */
  sumBelow(symbol: number): number {
    return prefix(this.#countTree, symbol);
  }

  /** Number of smaller symbols that were seen. */
  seenBelow(symbol: number): number {
    return prefix(this.#seenTree, symbol);
  }

  /** The symbol whose interval of counts holds `target`, 0 ≤ target < sum. */
  atSum(target: number): number {
    return this.weighed(target, 1, 0);
  }

  /** The symbol never seen that has `rank` such symbols below it. */
  unseenAt(rank: number): number {
    const tree = this.#seenTree;
    let at = 0;
    let left = rank;
    for (let step = this.#size; step > 0; step >>>= 1) {
      if (at + step > this.alphabetSize) continue;
      const unseen = step - tree[at + step];
      if (unseen <= left) {
        at += step;
        left -= unseen;
      }
    }
    return at;
  }

  /** The symbol that holds `target` where each weighs factor · count + base. */
  weighed(target: number, factor: number, base: number): number {
    const tree = this.#countTree;
    let at = 0;
    let left = target;
    for (let step = this.#size; step > 0; step >>>= 1) {
      if (at + step > this.alphabetSize) continue;
      const weight = factor * tree[at + step] + base * step;
      if (weight <= left) {
        at += step;
        left -= weight;
      }
    }
    return at;
  }

  /** Adds one to a symbol's count. */
  increment(symbol: number): void {
    this.#note(symbol);
    if (this.#seen[symbol] === 0) {
      this.#seen[symbol] = 1;
      this.distinct++;
      change(this.#seenTree, symbol, 1);
    }
    this.counts[symbol]++;
    this.sum++;
    change(this.#countTree, symbol, 1);
  }

  /** Takes a symbol's count out of the sums for a moment; {@link putBack} undoes it. */
  takeOut(symbol: number): void {
    this.sum -= this.counts[symbol];
    change(this.#countTree, symbol, -this.counts[symbol]);
  }

  putBack(symbol: number): void {
    this.sum += this.counts[symbol];
    change(this.#countTree, symbol, this.counts[symbol]);
  }

  /** Halves all counts: c becomes ⌈c/2⌉ or ⌊c/2⌋. */
  halve(): void {
    const odd = this.#halving === 'up' ? 1 : 0;
    const tree = this.#countTree;
    tree.fill(0);
    this.sum = 0;
    for (let symbol = 0; symbol < this.alphabetSize; symbol++) {
      if (this.counts[symbol] === 0) continue;
      this.#note(symbol);
      const count = (this.counts[symbol] + odd) >>> 1;
      this.counts[symbol] = count;
      this.sum += count;
      tree[symbol + 1] = count;
    }
    for (let i = 1; i <= this.#size; i++) {
      const up = i + (i & -i);
      if (up <= this.#size) tree[up] += tree[i];
    }
  }

  /** Makes the present counts the ones that {@link restore} returns to. */
  mark(): void {
    this.#marked = true;
    this.#markedCounts = this.counts.slice();
    this.#markedSeen = this.#seen.slice();
    this.#changed = new Uint32Array(this.alphabetSize);
    this.#isChanged.fill(0);
    this.#changedCount = 0;
  }

  restore(): void {
    for (let i = 0; i < this.#changedCount; i++) {
      const symbol = this.#changed[i];
      this.#isChanged[symbol] = 0;
      const difference = this.#markedCounts[symbol] - this.counts[symbol];
      if (difference !== 0) {
        this.counts[symbol] += difference;
        this.sum += difference;
        change(this.#countTree, symbol, difference);
      }
      if (this.#seen[symbol] !== this.#markedSeen[symbol]) {
        this.#seen[symbol] = 0;
        this.distinct--;
        change(this.#seenTree, symbol, -1);
      }
    }
    this.#changedCount = 0;
  }

  #note(symbol: number): void {
    if (!this.#marked || this.#isChanged[symbol] === 1) return;
    this.#isChanged[symbol] = 1;
    this.#changed[this.#changedCount++] = symbol;
  }
}

function prefix(tree: Int32Array, symbol: number): number {
  let sum = 0;
  for (let i = symbol; i > 0; i &= i - 1) sum += tree[i];
  return sum;
}

function change(tree: Int32Array, symbol: number, by: number): void {
  for (let i = symbol + 1; i < tree.length; i += i & -i) tree[i] += by;
}
