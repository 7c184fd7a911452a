import { LimitError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';

/** Most distinct n-grams of one table; with everything that is kept beside it, about 200 MB. */
export const MOST_NGRAMS = 2 ** 21;

/** Spaces of at most this many n-grams are indexed directly, larger ones by hashing. */
const DIRECT_SPACE = 2 ** 20;

/** n-grams handed over at once. */
const BATCH = 4096;

/**
 * m^n, the number of possible n-grams: exact below 2^53, which a power function need not be on
 * every engine.
 */
export function ngramSpace(alphabetSize: number, n: number): number {
  let space = 1;
  for (let i = 0; i < n; i++) space *= alphabetSize;
  return space;
}

/**
 * Distinct n-grams with their counts. An n-gram is one exact integer, its key: the symbols as
 * digits in base m, first symbol highest, below m^n < 2^53. Entries are numbered in order of first
 * sight.
 *
 * Memory: 16 bytes an entry and 4 bytes a slot, with a slot for each possible n-gram up to 2^20,
 * else at least 2 slots an entry (open addressing, linear probing).
 */
export class NgramIndex {
  keys = new Float64Array(64);
  counts = new Float64Array(64);
  size = 0;
  /** Sum of all counts. */
  total = 0;
  readonly #direct: boolean;
  /** Entry + 1, or 0 for a free slot. */
  #slots: Int32Array;

  /** @param space  m^n: keys lie below it */
  constructor(space: number) {
    this.#direct = space <= DIRECT_SPACE;
    this.#slots = new Int32Array(this.#direct ? space : 128);
  }

  /** Entry of `key`, or −1. */
  find(key: number): number {
    if (this.#direct) return this.#slots[key] - 1;
    return this.#slots[this.#slotOf(key)] - 1;
  }

  /**
   * Counts `key` once more and returns its entry.
   * @throws LimitError beyond {@link MOST_NGRAMS} entries
   */
  add(key: number): number {
    const slot = this.#direct ? key : this.#slotOf(key);
    let entry = this.#slots[slot] - 1;
    this.total++;
    if (entry >= 0) {
      this.counts[entry]++;
      return entry;
    }
    entry = this.size;
    if (entry === this.keys.length) this.#growEntries();
    this.keys[entry] = key;
    this.counts[entry] = 1;
    this.#slots[slot] = entry + 1;
    this.size = entry + 1;
    if (!this.#direct && 2 * this.size > this.#slots.length) this.#growSlots();
    return entry;
  }

  /** Back to no entries; costs what was in it. */
  clear(): void {
    // Last in, first out: no entry's probing passes over one that came in after it.
    for (let i = this.size - 1; i >= 0; i--) {
      this.#slots[this.#direct ? this.keys[i] : this.#slotOf(this.keys[i])] = 0;
    }
    this.size = 0;
    this.total = 0;
  }

  #slotOf(key: number): number {
    const slots = this.#slots;
    const mask = slots.length - 1;
    const high = Math.floor(key / 0x100000000);
    let hash = Math.imul(key >>> 0, 0x9e3779b1) ^ Math.imul(high, 0x85ebca77);
    hash ^= hash >>> 15;
    hash = Math.imul(hash, 0x2c1b3c6d);
    let slot = (hash ^ (hash >>> 13)) & mask;
    while (slots[slot] !== 0 && this.keys[slots[slot] - 1] !== key) slot = (slot + 1) & mask;
    return slot;
  }

  #growEntries(): void {
    if (this.size >= MOST_NGRAMS) {
      throw new LimitError('there are more distinct n-grams than a table may hold', {
        coder: 'block-huffman',
        expected: `at most ${MOST_NGRAMS}`,
        got: 'more',
        advice:
          'Take a smaller n, or symbols of a smaller alphabet: a table this long does not pay.',
      });
    }
    const keys = new Float64Array(2 * this.size);
    const counts = new Float64Array(2 * this.size);
    keys.set(this.keys);
    counts.set(this.counts);
    this.keys = keys;
    this.counts = counts;
  }

  #growSlots(): void {
    this.#slots = new Int32Array(2 * this.#slots.length);
    for (let i = 0; i < this.size; i++) this.#slots[this.#slotOf(this.keys[i])] = i + 1;
  }
}

/**
 * Cuts messages, handed over in pieces, into n-grams from their first symbol on. What is left at
 * the end, fewer than n symbols, is the message's tail.
 */
export class NgramCutter {
  /** The symbols since the last whole n-gram: at a message's end its tail. */
  readonly tail: Uint32Array;
  tailCount = 0;
  readonly #n: number;
  readonly #alphabetSize: number;
  readonly #receive: (keys: Float64Array, count: number) => void;
  readonly #keys = new Float64Array(BATCH);
  #filled = 0;

  /** @param receive  called with the keys of n-grams, in order; the array is used again */
  constructor(
    n: number,
    alphabetSize: number,
    receive: (keys: Float64Array, count: number) => void,
  ) {
    this.#n = n;
    this.#alphabetSize = alphabetSize;
    this.#receive = receive;
    this.tail = new Uint32Array(n);
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    const n = this.#n;
    const m = this.#alphabetSize;
    let at = from;
    if (this.tailCount > 0) {
      while (at < to && this.tailCount < n) this.tail[this.tailCount++] = symbols[at++];
      if (this.tailCount < n) return;
      let key = 0;
      for (let i = 0; i < n; i++) key = key * m + this.tail[i];
      this.tailCount = 0;
      this.#keys[this.#filled++] = key;
      if (this.#filled === BATCH) this.flush();
    }
    while (to - at >= n) {
      const room = BATCH - this.#filled;
      const end = at + n * Math.min(room, Math.floor((to - at) / n));
      const keys = this.#keys;
      let filled = this.#filled;
      if (n === 2) {
        for (; at < end; at += 2) keys[filled++] = symbols[at] * m + symbols[at + 1];
      } else {
        while (at < end) {
          let key = 0;
          for (const stop = at + n; at < stop; at++) key = key * m + symbols[at];
          keys[filled++] = key;
        }
      }
      this.#filled = filled;
      if (filled === BATCH) this.flush();
    }
    while (at < to) this.tail[this.tailCount++] = symbols[at++];
  }

  /** Hands over what is gathered. */
  flush(): void {
    if (this.#filled === 0) return;
    const count = this.#filled;
    this.#filled = 0;
    this.#receive(this.#keys, count);
  }
}

/** Splits the keys back into symbols: `keys[i]` gives `n` symbols from `n · i` on. */
export function expandKeys(
  keys: Float64Array,
  count: number,
  n: number,
  alphabetSize: number,
  into: SymbolArray,
): void {
  for (let i = 0; i < count; i++) {
    let rest = keys[i];
    for (let j = n - 1; j >= 0; j--) {
      const above = Math.floor(rest / alphabetSize);
      into[n * i + j] = rest - above * alphabetSize;
      rest = above;
    }
  }
}
