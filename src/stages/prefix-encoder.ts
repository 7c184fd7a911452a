import type { BitWriter } from '../bits/bit-writer.ts';
import { PromiseError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { ABSENT } from './code-lengths.ts';
import { LengthTally } from './prefix-code.ts';

/** Symbols coded between two looks at the room left in the writer. */
const BLOCK = 4096;

/** Symbols after which a table of pairs has paid for its making. */
const PAIRS_PAY_FROM = 32_768;

/**
 * A word, or a pair of words, of at most this many bits goes out at once beside 7 pending bits: 31
 * bits in all.
 */
export const WORD_BITS_AT_ONCE = 24;

/**
 * Writes symbols as words of a canonical prefix code, most significant bit first.
 *
 * The state is a 32-bit accumulator whose pending bits stand at the top; each word is or-ed in
 * below them and the whole accumulator stored, so that no branch depends on how many bytes are
 * complete. Byte alphabets in long messages look up two symbols at once in a table of 65 536 pairs
 * (256 KiB); the bits are the same either way.
 */
export class PrefixEncoder {
  readonly #alphabetSize: number;
  /** Word of each symbol, right-justified; for kernels that keep their own state. */
  readonly codes: Uint32Array;
  /** Its length in bits, or {@link ABSENT}. */
  readonly lengths: Uint8Array;
  readonly #tally = new LengthTally();
  /** Symbols that have a word, so that a new code need not clear the whole alphabet. */
  #present = new Uint32Array(0);
  #presentCount = 0;
  /** Longest word, in bits. */
  longest = 0;
  #pairs: Uint32Array | undefined;
  #pairsAreSet = false;
  #codedSinceSet = 0;
  #viewed: Uint8Array | undefined;
  #view: DataView = new DataView(new ArrayBuffer(8));

  /** @param alphabetSize  symbols are 0 … alphabetSize − 1; 5 bytes each */
  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
    this.codes = new Uint32Array(alphabetSize);
    this.lengths = new Uint8Array(alphabetSize).fill(ABSENT);
  }

  /**
   * Takes a new code: `symbols[i]` has a word of `lengths[i]` bits, i = 0 … count − 1, in canonical
   * order of the list. All other symbols have none.
   */
  setWords(symbols: Float64Array | Uint32Array, lengths: Uint8Array, count: number): void {
    const tally = this.#tally;
    tally.take(lengths, count);
    for (let i = 0; i < this.#presentCount; i++) this.lengths[this.#present[i]] = ABSENT;
    if (count > this.#present.length) this.#present = new Uint32Array(Math.max(2 * count, 64));
    this.longest = 0;
    for (let i = 0; i < count; i++) {
      const symbol = symbols[i];
      const length = lengths[i];
      this.#present[i] = symbol;
      this.lengths[symbol] = length;
      this.codes[symbol] = length === 0 ? 0 : tally.first[length]++;
      if (length > this.longest) this.longest = length;
    }
    this.#presentCount = count;
    this.#pairsAreSet = false;
    this.#codedSinceSet = 0;
  }

  /** Word length of a symbol in bits, or {@link ABSENT}. */
  lengthOf(symbol: number): number {
    return this.lengths[symbol];
  }

  /** Bits that {@link encode} would write; a symbol without a word counts as {@link ABSENT}. */
  bitsOf(symbols: SymbolArray, from: number, to: number): number {
    const { lengths } = this;
    let bits = 0;
    for (let i = from; i < to; i++) bits += lengths[symbols[i]];
    return bits;
  }

  /**
   * Writes `symbols[from … to − 1]`.
   * @returns bits written
   * @throws PromiseError for a symbol without a word
   */
  encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number): number {
    if (this.longest === 0) {
      for (let i = from; i < to; i++)
        if (this.lengths[symbols[i]] !== 0) this.#refuse(symbols[i], i);
      return 0;
    }
    this.#codedSinceSet += to - from;
    const pairs = this.pairs();
    const startBytes = writer.byteLength;
    const startBits = writer.pendingBits;
    const blockBytes = BLOCK * 4 + 8;
    for (let at = from; at < to; at += BLOCK) {
      const end = Math.min(to, at + BLOCK);
      writer.reserve(blockBytes);
      if (this.#viewed !== writer.bytes) {
        this.#viewed = writer.bytes;
        this.#view = new DataView(writer.bytes.buffer, writer.bytes.byteOffset);
      }
      if (pairs === undefined) this.#encodeSingles(writer, symbols, at, end);
      else this.#encodePairs(writer, symbols, at, end, pairs);
    }
    return 8 * (writer.byteLength - startBytes) + (writer.pendingBits - startBits);
  }

  #encodeSingles(writer: BitWriter, symbols: SymbolArray, from: number, to: number): void {
    const lengths = this.lengths;
    const codes = this.codes;
    const view = this.#view;
    let at = writer.byteLength;
    let bits = writer.pendingBits;
    // A shift by 32 would be a shift by 0: without pending bits `pending` is 0 and the shift does
    // no harm.
    let accumulator = writer.pending << (32 - bits);
    for (let i = from; i < to; i++) {
      const symbol = symbols[i];
      const length = lengths[symbol];
      if (length > WORD_BITS_AT_ONCE) {
        if (length === ABSENT) this.#refuse(symbol, i);
        // Upper part, all but 16 bits, then the lower part as any other word.
        const upper = length - 16;
        accumulator |= (codes[symbol] >>> 16) << (32 - bits - upper);
        view.setInt32(at, accumulator);
        bits += upper;
        accumulator <<= (bits >>> 3) << 3;
        at += bits >>> 3;
        bits &= 7;
        accumulator |= (codes[symbol] & 0xffff) << (16 - bits);
        view.setInt32(at, accumulator);
        bits += 16;
      } else {
        accumulator |= codes[symbol] << (32 - bits - length);
        view.setInt32(at, accumulator);
        bits += length;
      }
      accumulator <<= (bits >>> 3) << 3;
      at += bits >>> 3;
      bits &= 7;
    }
    writer.adopt(at, bits === 0 ? 0 : accumulator >>> (32 - bits), bits);
  }

  #encodePairs(
    writer: BitWriter,
    symbols: SymbolArray,
    from: number,
    to: number,
    pairs: Uint32Array,
  ): void {
    const view = this.#view;
    const last = to - 1;
    let at = writer.byteLength;
    let bits = writer.pendingBits;
    let accumulator = writer.pending << (32 - bits);
    let i = from;
    for (; i < last; i += 2) {
      const entry = pairs[symbols[i] | (symbols[i + 1] << 8)];
      if (entry === 0) {
        writer.adopt(at, bits === 0 ? 0 : accumulator >>> (32 - bits), bits);
        this.#encodeSingles(writer, symbols, i, i + 2);
        at = writer.byteLength;
        bits = writer.pendingBits;
        accumulator = writer.pending << (32 - bits);
        continue;
      }
      const length = entry & 31;
      accumulator |= (entry >>> 5) << (32 - bits - length);
      view.setInt32(at, accumulator);
      bits += length;
      accumulator <<= (bits >>> 3) << 3;
      at += bits >>> 3;
      bits &= 7;
    }
    writer.adopt(at, bits === 0 ? 0 : accumulator >>> (32 - bits), bits);
    if (i < to) this.#encodeSingles(writer, symbols, i, to);
  }

  /** Takes note of symbols to be coded by another kernel: see {@link pairs}. */
  expect(symbolCount: number): void {
    this.#codedSinceSet += symbolCount;
  }

  /**
   * Entry of first symbol + 256 × second: both words and, in the low 5 bits, their length; 0 where
   * they do not go at once. Undefined while so few symbols were coded that it would not pay.
   */
  pairs(): Uint32Array | undefined {
    if (this.#codedSinceSet < PAIRS_PAY_FROM || this.#alphabetSize > 256) return undefined;
    this.#pairs ??= new Uint32Array(65536);
    const pairs = this.#pairs;
    if (this.#pairsAreSet) return pairs;
    pairs.fill(0);
    const lengths = this.lengths;
    const codes = this.codes;
    for (let second = 0; second < this.#alphabetSize; second++) {
      const tail = lengths[second];
      if (tail > WORD_BITS_AT_ONCE) continue;
      for (let first = 0; first < this.#alphabetSize; first++) {
        const length = lengths[first] + tail;
        if (length > WORD_BITS_AT_ONCE) continue;
        pairs[first | (second << 8)] = (((codes[first] << tail) | codes[second]) << 5) | length;
      }
    }
    this.#pairsAreSet = true;
    return pairs;
  }

  #refuse(symbol: number, index: number): never {
    throw new PromiseError('a symbol to code has no code word', {
      symbolIndex: index,
      got: `symbol ${symbol}`,
      advice: 'The tables were fitted to other symbols than the ones coded.',
    });
  }
}
