import type { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { LENGTH_SLOTS, LengthTally } from './prefix-code.ts';

/**
 * Bits that the look-up table of a byte alphabet sees at once; its entries hold up to three
 * symbols.
 */
const BYTE_TABLE_BITS = 12;
/** The same for larger alphabets, with one symbol an entry. */
const WIDE_TABLE_BITS = 16;
/** Room for a symbol beside a word length in a 32-bit entry. */
const SYMBOL_SPAN = 2 ** 27;

/**
 * Reads symbols that PrefixEncoder wrote.
 *
 * One look at the next bits gives up to three symbols of a byte alphabet, or one of a larger; words
 * longer than the table's index are found by their canonical first words, length by length. Bits
 * are loaded 32 at a time past the message's own end, which is harmless: a word that lies within
 * the message does not depend on what follows, and one that does not is refused.
 */
export class PrefixDecoder {
  readonly #byteAlphabet: boolean;
  readonly #tally = new LengthTally();
  readonly #offsets = new Float64Array(LENGTH_SLOTS);
  /** Symbols in canonical order. */
  #sorted = new Uint32Array(0);
  #table = new Uint32Array(0);
  #singles = new Uint32Array(0);
  #tableBits = 0;
  #longest = 0;
  #shortest = 0;
  #lone = -1;
  readonly #byteLengths = new Uint8Array(256);
  #viewed: Uint8Array | undefined;
  #view: DataView = new DataView(new ArrayBuffer(8));
  #outBuffer: ArrayBufferLike | undefined;
  #outView: DataView = new DataView(new ArrayBuffer(8));

  /** @param alphabetSize  at most 2^27 */
  constructor(alphabetSize: number) {
    this.#byteAlphabet = alphabetSize <= 256;
  }

  /** Length of the shortest word, in bits: no message of n symbols is shorter than n times this. */
  get shortestWordBits(): number {
    return this.#shortest;
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
    this.#lone = tally.counts[0] > 0 ? symbols[0] : -1;
    this.#longest = 0;
    this.#shortest = 0;
    let at = 0;
    for (let length = 1; length < LENGTH_SLOTS; length++) {
      this.#offsets[length] = at;
      at += tally.counts[length];
      if (tally.counts[length] === 0) continue;
      this.#longest = length;
      if (this.#shortest === 0) this.#shortest = length;
    }
    if (count > this.#sorted.length) this.#sorted = new Uint32Array(Math.max(count, 64));
    if (this.#lone >= 0) return;
    for (let i = 0; i < count; i++) this.#sorted[this.#offsets[lengths[i]]++] = symbols[i];
    for (let length = 1; length < LENGTH_SLOTS; length++)
      this.#offsets[length] -= tally.counts[length];
    const most = this.#byteAlphabet ? BYTE_TABLE_BITS : WIDE_TABLE_BITS;
    const worth = 32 - Math.clz32(Math.min(expectedSymbols, 2 ** 30));
    this.#tableBits = Math.max(1, Math.min(this.#longest, most, worth));
    if (this.#byteAlphabet && worth >= BYTE_TABLE_BITS) this.#tableBits = BYTE_TABLE_BITS;
    this.#fillTable();
  }

  /** One symbol an entry, symbol · 32 + length; then, for bytes, as many as fit. */
  #fillTable(): void {
    const tableBits = this.#tableBits;
    const size = 2 ** tableBits;
    if (this.#table.length < size) this.#table = new Uint32Array(size);
    if (this.#byteAlphabet && this.#singles.length < size) this.#singles = new Uint32Array(size);
    const singles = this.#byteAlphabet ? this.#singles : this.#table;
    let index = 0;
    let sorted = 0;
    for (let length = 1; length <= tableBits; length++) {
      const span = 2 ** (tableBits - length);
      for (let left = this.#tally.counts[length]; left > 0; left--) {
        const symbol = this.#sorted[sorted++];
        if (this.#byteAlphabet) this.#byteLengths[symbol] = length;
        singles.fill(symbol * 32 + length, index, index + span);
        index += span;
      }
    }
    singles.fill(0, index, size);
    if (!this.#byteAlphabet) return;

    const table = this.#table;
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
      table[i] = entry | (used << 24) | (held << 28);
    }
  }

  /**
   * Decodes into `out[from … to − 1]`, from the reader's position, which moves on; a `stop` symbol
   * ends the decoding early.
   * @returns index past the last symbol decoded: `to`, or one past the first `stop`
   * @throws CorruptStreamError for a word that no symbol has, or one that passes the reader's limit
   */
  decode(reader: BitReader, out: SymbolArray, from: number, to: number, stop = -1): number {
    if (this.#lone >= 0) {
      const end = this.#lone === stop ? Math.min(to, from + 1) : to;
      out.fill(this.#lone, from, end);
      return end;
    }
    if (this.#viewed !== reader.bytes) {
      const { buffer, byteOffset, byteLength } = reader.bytes;
      this.#viewed = reader.bytes;
      this.#view = new DataView(buffer, byteOffset, byteLength);
    }
    if (this.#byteAlphabet && stop < 0 && out instanceof Uint8Array)
      return this.#decodeBytes(reader, out, from, to);
    return this.#decodeWide(reader, out, from, to, stop);
  }

  #decodeBytes(reader: BitReader, out: Uint8Array, from: number, to: number): number {
    if (this.#outBuffer !== out.buffer) {
      this.#outBuffer = out.buffer;
      this.#outView = new DataView(out.buffer);
    }
    const table = this.#table;
    const shift = 32 - this.#tableBits;
    const byteLengths = this.#byteLengths;
    const view = this.#view;
    const outView = this.#outView;
    const outOffset = out.byteOffset;
    const lastLoad = reader.bytes.length - 5;
    let bit = reader.position % 8;
    let at = (reader.position - bit) / 8;
    let filled = from;

    // Two look-ups take at most 24 of the 25 bits loaded and give at most 6 symbols; the second
    // store covers 7.
    const lastTriple = to - 7;
    while (filled <= lastTriple && at <= lastLoad) {
      const window = view.getInt32(at) << bit;
      let entry = table[window >>> shift];
      if (entry === 0) {
        const found = this.#walk(this.#window(at, bit), this.#positionOf(at, bit));
        out[filled++] = found % SYMBOL_SPAN;
        bit += Math.floor(found / SYMBOL_SPAN);
      } else {
        outView.setInt32(outOffset + filled, entry, true);
        filled += entry >>> 28;
        const used = (entry >>> 24) & 15;
        bit += used;
        entry = table[(window << used) >>> shift];
        if (entry !== 0) {
          outView.setInt32(outOffset + filled, entry, true);
          filled += entry >>> 28;
          bit += (entry >>> 24) & 15;
        }
      }
      at += bit >>> 3;
      bit &= 7;
    }
    while (filled < to && at <= lastLoad) {
      const entry = table[(view.getInt32(at) << bit) >>> shift];
      if (entry === 0) {
        const found = this.#walk(this.#window(at, bit), this.#positionOf(at, bit));
        out[filled++] = found % SYMBOL_SPAN;
        bit += Math.floor(found / SYMBOL_SPAN);
      } else {
        const symbol = entry & 0xff;
        out[filled++] = symbol;
        bit += byteLengths[symbol];
      }
      at += bit >>> 3;
      bit &= 7;
    }
    reader.seek(this.#positionOf(at, bit));
    return this.#decodeLast(reader, out, filled, to, -1);
  }

  #decodeWide(reader: BitReader, out: SymbolArray, from: number, to: number, stop: number): number {
    const table = this.#byteAlphabet ? this.#singles : this.#table;
    const shift = 32 - this.#tableBits;
    const view = this.#view;
    const lastLoad = reader.bytes.length - 5;
    let bit = reader.position % 8;
    let at = (reader.position - bit) / 8;
    let filled = from;
    while (filled < to && at <= lastLoad) {
      const entry = table[(view.getInt32(at) << bit) >>> shift];
      let symbol = entry >>> 5;
      if (entry === 0) {
        const found = this.#walk(this.#window(at, bit), this.#positionOf(at, bit));
        symbol = found % SYMBOL_SPAN;
        bit += Math.floor(found / SYMBOL_SPAN);
      } else {
        bit += entry & 31;
      }
      at += bit >>> 3;
      bit &= 7;
      out[filled++] = symbol;
      if (symbol === stop) {
        reader.seek(this.#positionOf(at, bit));
        return filled;
      }
    }
    reader.seek(this.#positionOf(at, bit));
    return this.#decodeLast(reader, out, filled, to, stop);
  }

  /** The last few symbols of the bytes, where 32 bits cannot be loaded at once any more. */
  #decodeLast(reader: BitReader, out: SymbolArray, from: number, to: number, stop: number): number {
    for (let filled = from; filled < to; filled++) {
      const found = this.#walk(reader.peekBits(32), reader.position);
      reader.seek(reader.position + Math.floor(found / SYMBOL_SPAN));
      out[filled] = found % SYMBOL_SPAN;
      if (out[filled] === stop) return filled + 1;
    }
    return to;
  }

  #positionOf(at: number, bit: number): number {
    return at * 8 + bit;
  }

  /** The 32 bits from bit `bit` of byte `at`, where 5 bytes are there. */
  #window(at: number, bit: number): number {
    return (this.#view.getInt32(at) << bit) | (this.#view.getUint8(at + 4) >>> (8 - bit));
  }

  /** The word at the top of `window`, as length · 2^27 + symbol. */
  #walk(window: number, position: number): number {
    const { first, counts } = this.#tally;
    for (let length = this.#shortest; length <= this.#longest; length++) {
      const rank = (window >>> (32 - length)) - first[length];
      if (rank < counts[length])
        return length * SYMBOL_SPAN + this.#sorted[this.#offsets[length] + rank];
    }
    throw new CorruptStreamError('the coded bytes hold a word that no symbol has', {
      bitOffset: position,
      advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
    });
  }
}
