import { LENGTH_SLOTS, LengthTally } from './prefix-code.ts';

/**
 * Bits that the look-up table of a byte alphabet sees at once; its entries hold up to three
 * symbols.
 */
const BYTE_TABLE_BITS = 12;
/** The same for larger alphabets, with one symbol an entry. */
const WIDE_TABLE_BITS = 16;
/** Room for a symbol beside a word length in one number. */
export const SYMBOL_SPAN = 2 ** 27;

/**
 * The tables by which a prefix code is decoded. One look at the next bits gives up to three symbols
 * of a byte alphabet, or one of a larger; words longer than the tables' index are found by their
 * canonical first words, length by length.
 */
export class PrefixLookup {
  readonly byteAlphabet: boolean;
  /** Index length of both tables, in bits. */
  tableBits = 0;
  /** One symbol an entry: symbol · 32 + length; 0 where the word is longer, or none. */
  singles = new Uint32Array(0);
  /**
   * Byte alphabets: symbols from the low byte up, the length of their words together from bit 24,
   * how many there are from bit 28; 0 as for `singles`.
   */
  triples = new Uint32Array(0);
  /** Byte alphabets: word lengths by symbol, of the words that the tables hold. */
  readonly byteLengths = new Uint8Array(256);
  /** Longest and shortest word, in bits. */
  longest = 0;
  shortest = 0;
  /** The symbol whose word is empty, or −1. */
  lone = -1;
  readonly #tally = new LengthTally();
  readonly #offsets = new Float64Array(LENGTH_SLOTS);
  /** Symbols in canonical order. */
  #sorted = new Uint32Array(0);

  /** @param alphabetSize  at most 2^27 */
  constructor(alphabetSize: number) {
    this.byteAlphabet = alphabetSize <= 256;
  }

  /**
   * Takes a new code, as `PrefixEncoder.setWords` does, and makes its tables.
   * @param expectedSymbols  about how many will be decoded with it; a guide for the size of the
   *   table
   */
  setWords(
    symbols: Float64Array | Uint32Array,
    lengths: Uint8Array,
    count: number,
    expectedSymbols: number,
  ): void {
    const tally = this.#tally;
    tally.take(lengths, count);
    this.lone = tally.counts[0] > 0 ? symbols[0] : -1;
    this.longest = 0;
    this.shortest = 0;
    let at = 0;
    for (let length = 1; length < LENGTH_SLOTS; length++) {
      this.#offsets[length] = at;
      at += tally.counts[length];
      if (tally.counts[length] === 0) continue;
      this.longest = length;
      if (this.shortest === 0) this.shortest = length;
    }
    if (count > this.#sorted.length) this.#sorted = new Uint32Array(Math.max(count, 64));
    if (this.lone >= 0) return;
    for (let i = 0; i < count; i++) this.#sorted[this.#offsets[lengths[i]]++] = symbols[i];
    for (let length = 1; length < LENGTH_SLOTS; length++)
      this.#offsets[length] -= tally.counts[length];
    const most = this.byteAlphabet ? BYTE_TABLE_BITS : WIDE_TABLE_BITS;
    const worth = 32 - Math.clz32(Math.min(expectedSymbols, 2 ** 30));
    this.tableBits = Math.max(1, Math.min(this.longest, most, worth));
    if (this.byteAlphabet && worth >= BYTE_TABLE_BITS) this.tableBits = BYTE_TABLE_BITS;
    this.#fillTable();
  }

  /** One symbol an entry, symbol · 32 + length; then, for bytes, as many as fit. */
  #fillTable(): void {
    const tableBits = this.tableBits;
    const size = 2 ** tableBits;
    if (this.singles.length < size) this.singles = new Uint32Array(size);
    const { singles } = this;
    let index = 0;
    let sorted = 0;
    for (let length = 1; length <= tableBits; length++) {
      const span = 2 ** (tableBits - length);
      for (let left = this.#tally.counts[length]; left > 0; left--) {
        const symbol = this.#sorted[sorted++];
        if (this.byteAlphabet) this.byteLengths[symbol] = length;
        singles.fill(symbol * 32 + length, index, index + span);
        index += span;
      }
    }
    singles.fill(0, index, size);
    if (!this.byteAlphabet) return;

    if (this.triples.length < size) this.triples = new Uint32Array(size);
    const { triples } = this;
    for (let i = 0; i < size; i++) {
      let entry = 0;
      let used = 0;
      let held = 0;
      while (held < 3) {
        const single = singles[(i << used) & (size - 1)];
        const length = single & 31;
        if (length === 0 || used + length > tableBits) break;
        entry |= (single >>> 5) << (8 * held++);
        used += length;
      }
      triples[i] = entry | (used << 24) | (held << 28);
    }
  }

  /** The word at the top of 32 bits, as length · 2^27 + symbol; −1 where no symbol has it. */
  find(window: number): number {
    const { first, counts } = this.#tally;
    for (let length = this.shortest; length <= this.longest; length++) {
      const rank = (window >>> (32 - length)) - first[length];
      if (rank < counts[length])
        return length * SYMBOL_SPAN + this.#sorted[this.#offsets[length] + rank];
    }
    return -1;
  }
}
