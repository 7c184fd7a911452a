import type { SymbolArray } from '../symbols/sequence.ts';

/** Bytes that make the four-way count worth its set-up. */
const LANES_PAY_FROM = 2048;

/**
 * Counts of symbols, in buffers that are used again: `counts` by symbol, and the list of those
 * seen, so that a count of a short message costs nothing for the rest of the alphabet.
 */
export class SymbolCounts {
  /** By symbol; exact to 2^53. */
  readonly counts: Float64Array;
  /** Symbols whose count is not 0, in order of first sight until {@link sort}. */
  readonly seen: Uint32Array;
  seenCount = 0;
  /** Sum of all counts. */
  total = 0;
  readonly #lanes: Uint32Array;

  /** @param alphabetSize  m; 12 bytes a symbol */
  constructor(alphabetSize: number) {
    this.counts = new Float64Array(alphabetSize);
    this.seen = new Uint32Array(alphabetSize);
    this.#lanes = new Uint32Array(alphabetSize <= 256 ? 1024 : 0);
  }

  /** Adds `symbols[from … to − 1]`. */
  add(symbols: SymbolArray, from: number, to: number): void {
    this.total += to - from;
    if (symbols instanceof Uint8Array && this.#lanes.length > 0 && to - from >= LANES_PAY_FROM) {
      this.#addLanes(symbols, from, to);
      return;
    }
    const { counts, seen } = this;
    let seenCount = this.seenCount;
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      if (counts[symbol]++ === 0) seen[seenCount++] = symbol;
    }
    this.seenCount = seenCount;
  }

  /**
   * Four bytes a load, each into counters of its own, so that a run of one byte does not wait for
   * itself.
   */
  #addLanes(symbols: Uint8Array, from: number, to: number): void {
    const lanes = this.#lanes;
    lanes.fill(0);
    let at = from;
    while ((symbols.byteOffset + at) % 4 !== 0) lanes[symbols[at++]]++;
    const words = new Uint32Array(symbols.buffer, symbols.byteOffset + at, (to - at) >>> 2);
    for (let i = 0; i < words.length; i++) {
      const word = words[i];
      lanes[word & 0xff]++;
      lanes[256 + ((word >>> 8) & 0xff)]++;
      lanes[512 + ((word >>> 16) & 0xff)]++;
      lanes[768 + (word >>> 24)]++;
    }
    for (at += 4 * words.length; at < to; at++) lanes[symbols[at]]++;
    for (let symbol = 0; symbol < this.counts.length; symbol++) {
      const count = lanes[symbol] + lanes[256 + symbol] + lanes[512 + symbol] + lanes[768 + symbol];
      if (count === 0) continue;
      if (this.counts[symbol] === 0) this.seen[this.seenCount++] = symbol;
      this.counts[symbol] += count;
    }
  }

  /** Brings {@link seen} into rising order. */
  sort(): void {
    if (this.seenCount * 8 > this.counts.length) {
      let at = 0;
      for (let symbol = 0; at < this.seenCount; symbol++)
        if (this.counts[symbol] > 0) this.seen[at++] = symbol;
    } else {
      this.seen.subarray(0, this.seenCount).sort();
    }
  }

  /** Back to no symbols. */
  clear(): void {
    for (let i = 0; i < this.seenCount; i++) this.counts[this.seen[i]] = 0;
    this.seenCount = 0;
    this.total = 0;
  }
}
