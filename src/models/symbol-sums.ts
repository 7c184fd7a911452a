import type { Halving } from './symbol-runs.ts';

/**
 * Counts of one context over the whole alphabet, in the order of the alphabet: what the empty context uses, which meets
 * every symbol.
 *
 * Two complete binary trees over the alphabet, of counts and of "seen at all", where a node keeps the sum of its left half:
 * sums and look-ups take ⌈log2 m⌉ steps without a branch that depends on the data. After {@link mark}, {@link restore}
 * brings back the marked counts at a cost that goes with the symbols that changed.
 *
 * Memory: 14 to 24 bytes a symbol of the alphabet, 9 more once marked.
 */
export class SymbolSums {
  readonly alphabetSize: number;
  readonly counts: Uint32Array;
  /** Sum of the counts. */
  sum = 0;
  /** Symbols seen; a count halved to 0 is one of them. */
  distinct = 0;

  readonly #halving: Halving;
  readonly #levels: number;
  readonly #seen: Uint8Array;
  /** Node i has the halves 2i and 2i + 1; the root is 1. */
  readonly #leftCounts: Int32Array;
  readonly #leftSeen: Int32Array;

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
    this.#levels = alphabetSize === 1 ? 0 : 32 - Math.clz32(alphabetSize - 1);
    this.#leftCounts = new Int32Array(2 ** this.#levels);
    this.#leftSeen = new Int32Array(2 ** this.#levels);
  }

  /** A copy that shares nothing and is not marked. */
  clone(): SymbolSums {
    const copy = new SymbolSums(this.alphabetSize, this.#halving);
    copy.counts.set(this.counts);
    copy.#seen.set(this.#seen);
    copy.#leftCounts.set(this.#leftCounts);
    copy.#leftSeen.set(this.#leftSeen);
    copy.sum = this.sum;
    copy.distinct = this.distinct;
    return copy;
  }

  hasSeen(symbol: number): boolean {
    return this.#seen[symbol] === 1;
  }

  /** Sum of the counts of all smaller symbols. */
  sumBelow(symbol: number): number {
    return sumLeft(this.#leftCounts, this.#levels, symbol);
  }

  /** Number of smaller symbols that were seen. */
  seenBelow(symbol: number): number {
    return sumLeft(this.#leftSeen, this.#levels, symbol);
  }

  /** The symbol that holds `target` where each weighs factor · count + base; target below the sum of the weights. */
  holding(target: number, factor: number, base: number): number {
    const left = this.#leftCounts;
    let node = 1;
    let rest = target;
    let symbol = 0;
    for (let level = this.#levels - 1; level >= 0; level--) {
      // A left half may hold places past the alphabet, but then the right half holds nothing else.
      const weight = factor * left[node] + base * (1 << level);
      const bit = rest >= weight ? 1 : 0;
      rest -= bit * weight;
      symbol = 2 * symbol + bit;
      node = 2 * node + bit;
    }
    return symbol;
  }

  /** The symbol never seen that has `rank` such symbols below it. */
  unseenAt(rank: number): number {
    const left = this.#leftSeen;
    let node = 1;
    let rest = rank;
    let symbol = 0;
    for (let level = this.#levels - 1; level >= 0; level--) {
      const unseen = (1 << level) - left[node];
      const bit = rest >= unseen ? 1 : 0;
      rest -= bit * unseen;
      symbol = 2 * symbol + bit;
      node = 2 * node + bit;
    }
    return symbol;
  }

  /** Adds one to a symbol's count; returns the sum of the counts of all smaller symbols. */
  increment(symbol: number): number {
    if (this.#marked || this.#seen[symbol] === 0) this.#note(symbol);
    const left = this.#leftCounts;
    let low = 0;
    let node = 1;
    for (let level = this.#levels - 1; level >= 0; level--) {
      const bit = (symbol >>> level) & 1;
      const sum = left[node];
      low += sum & -bit;
      left[node] = sum + 1 - bit;
      node = 2 * node + bit;
    }
    this.counts[symbol]++;
    this.sum++;
    return low;
  }

  /** Takes a symbol's count out of the sums for a moment; {@link putBack} undoes it. */
  takeOut(symbol: number): void {
    this.sum -= this.counts[symbol];
    change(this.#leftCounts, this.#levels, symbol, -this.counts[symbol]);
  }

  putBack(symbol: number): void {
    this.sum += this.counts[symbol];
    change(this.#leftCounts, this.#levels, symbol, this.counts[symbol]);
  }

  /** Halves all counts: c becomes ⌈c/2⌉ or ⌊c/2⌋. */
  halve(): void {
    const odd = this.#halving === 'up' ? 1 : 0;
    this.#leftCounts.fill(0);
    this.sum = 0;
    for (let symbol = 0; symbol < this.alphabetSize; symbol++) {
      if (this.counts[symbol] === 0) continue;
      if (this.#marked) this.#note(symbol);
      const count = (this.counts[symbol] + odd) >>> 1;
      this.counts[symbol] = count;
      this.sum += count;
      change(this.#leftCounts, this.#levels, symbol, count);
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
        change(this.#leftCounts, this.#levels, symbol, difference);
      }
      if (this.#seen[symbol] !== this.#markedSeen[symbol]) {
        this.#seen[symbol] = 0;
        this.distinct--;
        change(this.#leftSeen, this.#levels, symbol, -1);
      }
    }
    this.#changedCount = 0;
  }

  /** A symbol is about to change. */
  #note(symbol: number): void {
    if (this.#marked && this.#isChanged[symbol] === 0) {
      this.#isChanged[symbol] = 1;
      this.#changed[this.#changedCount++] = symbol;
    }
    if (this.#seen[symbol] === 1) return;
    this.#seen[symbol] = 1;
    this.distinct++;
    change(this.#leftSeen, this.#levels, symbol, 1);
  }
}

function sumLeft(left: Int32Array, levels: number, symbol: number): number {
  let sum = 0;
  let node = 1;
  for (let level = levels - 1; level >= 0; level--) {
    const bit = (symbol >>> level) & 1;
    sum += left[node] & -bit;
    node = 2 * node + bit;
  }
  return sum;
}

function change(left: Int32Array, levels: number, symbol: number, by: number): void {
  let node = 1;
  for (let level = levels - 1; level >= 0; level--) {
    const bit = (symbol >>> level) & 1;
    left[node] += by & (bit - 1);
    node = 2 * node + bit;
  }
}
