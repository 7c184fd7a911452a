import type { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { PrefixLookup, SYMBOL_SPAN } from './prefix-lookup.ts';

/**
 * Reads symbols that PrefixEncoder wrote, by the tables of {@link PrefixLookup}.
 *
 * Bits are loaded 32 at a time past the message's own end, which is harmless: a word that lies
 * within the message does not depend on what follows, and one that does not is refused.
 */
export class PrefixDecoder {
  /** The tables, for kernels that keep their own state. */
  readonly lookup: PrefixLookup;
  #viewed: Uint8Array | undefined;
  #view: DataView = new DataView(new ArrayBuffer(8));
  #outBuffer: ArrayBufferLike | undefined;
  #outView: DataView = new DataView(new ArrayBuffer(8));

  /** @param alphabetSize  at most 2^27 */
  constructor(alphabetSize: number) {
    this.lookup = new PrefixLookup(alphabetSize);
  }

  /** Length of the shortest word, in bits: no message of n symbols is shorter than n times this. */
  get shortestWordBits(): number {
    return this.lookup.shortest;
  }

  /** Takes a new code: see {@link PrefixLookup.setWords}. */
  setWords(
    symbols: Float64Array | Uint32Array,
    lengths: Uint8Array,
    count: number,
    expectedSymbols: number,
  ): void {
    this.lookup.setWords(symbols, lengths, count, expectedSymbols);
  }

  /**
   * Decodes into `out[from … to − 1]`, from the reader's position, which moves on; a `stop` symbol
   * ends the decoding early.
   * @returns index past the last symbol decoded: `to`, or one past the first `stop`
   * @throws CorruptStreamError for a word that no symbol has, or one that passes the reader's limit
   */
  decode(reader: BitReader, out: SymbolArray, from: number, to: number, stop = -1): number {
    const { lone, byteAlphabet } = this.lookup;
    if (lone >= 0) {
      const end = lone === stop ? Math.min(to, from + 1) : to;
      out.fill(lone, from, end);
      return end;
    }
    if (this.#viewed !== reader.bytes) {
      const { buffer, byteOffset, byteLength } = reader.bytes;
      this.#viewed = reader.bytes;
      this.#view = new DataView(buffer, byteOffset, byteLength);
    }
    if (byteAlphabet && stop < 0 && out instanceof Uint8Array)
      return this.#decodeBytes(reader, out, from, to);
    return this.#decodeWide(reader, out, from, to, stop);
  }

  #decodeBytes(reader: BitReader, out: Uint8Array, from: number, to: number): number {
    if (this.#outBuffer !== out.buffer) {
      this.#outBuffer = out.buffer;
      this.#outView = new DataView(out.buffer);
    }
    const { triples: table, byteLengths, tableBits } = this.lookup;
    const shift = 32 - tableBits;
    const view = this.#view;
    const outView = this.#outView;
    const outOffset = out.byteOffset;
    const lastLoad = reader.bytes.length - 5;
    // Integers of 32 bits in the eyes of the engine, also where the position is larger.
    let bit = reader.position & 7;
    let at = ((reader.position - bit) / 8) >>> 0;
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
    const { singles: table, tableBits } = this.lookup;
    const shift = 32 - tableBits;
    const view = this.#view;
    const lastLoad = reader.bytes.length - 5;
    // Integers of 32 bits in the eyes of the engine, also where the position is larger.
    let bit = reader.position & 7;
    let at = ((reader.position - bit) / 8) >>> 0;
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
    const found = this.lookup.find(window);
    if (found >= 0) return found;
    throw new CorruptStreamError('the coded bytes hold a word that no symbol has', {
      bitOffset: position,
      advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
    });
  }
}
