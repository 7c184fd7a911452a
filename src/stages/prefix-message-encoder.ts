import type { BitWriter } from '../bits/bit-writer.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import { ABSENT } from './code-lengths.ts';
import { type PrefixEncoder, WORD_BITS_AT_ONCE } from './prefix-encoder.ts';

/** Symbols of a message; longer ones gain nothing here. */
const MOST_SYMBOLS = 4096;
/** More padding than this does not go out in one store. */
const MOST_ALIGN_BITS = 32;
/** Bytes after which one run is over; one message more may follow. */
const RUN_BYTES = 2 ** 16;
/** More than a count and padding take, and what is stored beyond the end. */
const FRAME_BYTES = 16;
/** Most bytes of one message, with words of up to 32 bits. */
const MESSAGE_BYTES = MOST_SYMBOLS * 4 + FRAME_BYTES;

/**
 * Writes many short messages at once, with all state in locals from message to message; the bits
 * are those of the plain path. It stops in front of a message that it does not take: one that is
 * long, or that the plain path refuses.
 */
export class PrefixMessageEncoder {
  /** Of the last run, in bits: words, counts and padding. */
  writtenBits = 0;
  framingBits = 0;
  paddingBits = 0;
  readonly #words: PrefixEncoder;
  readonly #align: number;
  readonly #unitSymbols: number;

  /**
   * @param align        1, 2, 4, or a multiple of 8
   * @param unitSymbols  symbols that a count counts by; 0: no counts
   */
  constructor(words: PrefixEncoder, align: number, unitSymbols: number) {
    this.#words = words;
    this.#align = align;
    this.#unitSymbols = unitSymbols;
  }

  /**
   * Writes messages from index `first` on, about 64 KiB of them, and gives their ends in bits to
   * `endsBits[endsAt …]`.
   * @param from  first symbol of message `first`
   * @returns index of the first message that was not written
   */
  run(
    writer: BitWriter,
    symbols: SymbolArray,
    messageEnds: Uint32Array,
    first: number,
    from: number,
    endsBits: Float64Array,
    endsAt: number,
  ): number {
    this.writtenBits = 0;
    this.framingBits = 0;
    this.paddingBits = 0;
    const align = this.#align;
    if (align > MOST_ALIGN_BITS || this.#words.longest === 0) return first;
    const messageCount = messageEnds.length;
    if (first === messageCount) return first;
    const mostBytes =
      (messageEnds[messageCount - 1] - from) * 4 + (messageCount - first) * FRAME_BYTES;
    writer.reserve(Math.min(RUN_BYTES + MESSAGE_BYTES, mostBytes + FRAME_BYTES));
    const unitSymbols = this.#unitSymbols;
    const { codes, lengths } = this.#words;
    const pairs = this.#words.pairs();
    const view = new DataView(writer.bytes.buffer, writer.bytes.byteOffset);
    const alignBytes = align >>> 3;
    let at = writer.byteLength;
    let bits = writer.pendingBits;
    // A shift by 32 would be a shift by 0: without pending bits `pending` is 0 and the shift does no harm.
    let accumulator = writer.pending << (32 - bits);
    // Bits that the writer has handed on already.
    const baseBits = writer.position - (at * 8 + bits);
    const baseBytes = align <= 8 ? 0 : (baseBits / 8) % alignBytes;
    const lastStart = at + RUN_BYTES;
    let startAt = at;
    let startBits = bits;
    let startAccumulator = accumulator;
    let writtenBits = 0;
    let framingBits = 0;
    let paddingBits = 0;
    let index = first;
    let i = from;
    for (; index < messageCount; index++) {
      startAt = at;
      startBits = bits;
      startAccumulator = accumulator;
      const to = messageEnds[index];
      if (to - i > MOST_SYMBOLS || at > lastStart) break;
      let countBits = 0;
      if (unitSymbols > 0) {
        const number = (unitSymbols === 1 ? to - i : (to - i) / unitSymbols) + 1;
        if (number >>> 0 !== number) break;
        const length = 32 - Math.clz32(number);
        countBits = 2 * (31 - Math.clz32(length)) + length;
        const word = (length << (length - 1)) | (number ^ (1 << (length - 1)));
        accumulator |= word << (32 - bits - countBits);
        view.setInt32(at, accumulator);
        bits += countBits;
        accumulator <<= (bits >>> 3) << 3;
        at += bits >>> 3;
        bits &= 7;
      }

      const wordsAt = at;
      const wordsBits = bits;
      const last = to - 1;
      let known = true;
      while (i < to) {
        let stop = to;
        if (pairs !== undefined) {
          for (; i < last; i += 2) {
            const entry = pairs[symbols[i] | (symbols[i + 1] << 8)];
            if (entry === 0) break;
            const length = entry & 31;
            accumulator |= (entry >>> 5) << (32 - bits - length);
            view.setInt32(at, accumulator);
            bits += length;
            accumulator <<= (bits >>> 3) << 3;
            at += bits >>> 3;
            bits &= 7;
          }
          stop = Math.min(to, i + 2);
        }
        for (; i < stop; i++) {
          const symbol = symbols[i];
          let length = lengths[symbol];
          let word = codes[symbol];
          if (length > WORD_BITS_AT_ONCE) {
            if (length === ABSENT) {
              known = false;
              break;
            }
            accumulator |= (word >>> 16) << (48 - bits - length);
            view.setInt32(at, accumulator);
            bits += length - 16;
            accumulator <<= (bits >>> 3) << 3;
            at += bits >>> 3;
            bits &= 7;
            word &= 0xffff;
            length = 16;
          }
          accumulator |= word << (32 - bits - length);
          view.setInt32(at, accumulator);
          bits += length;
          accumulator <<= (bits >>> 3) << 3;
          at += bits >>> 3;
          bits &= 7;
        }
        if (!known) break;
      }
      if (!known) break;
      writtenBits += (at - wordsAt) * 8 + bits - wordsBits;
      framingBits += countBits;

      if (align <= 8) {
        const padding = -bits & (align - 1);
        paddingBits += padding;
        bits += padding;
        accumulator <<= (bits >>> 3) << 3;
      } else {
        const over = ((baseBytes + at) % alignBytes) * 8 + bits;
        const padding = over === 0 ? 0 : align - over;
        // Bytes of padding may lie where older bytes stood.
        view.setInt32(at, accumulator);
        paddingBits += padding;
        bits += padding;
        accumulator = 0;
      }
      at += bits >>> 3;
      bits &= 7;
      endsBits[endsAt + index - first] = baseBits + at * 8 + bits;
    }
    if (index === messageCount) {
      startAt = at;
      startBits = bits;
      startAccumulator = accumulator;
    }
    this.writtenBits = writtenBits;
    this.framingBits = framingBits;
    this.paddingBits = paddingBits;
    writer.adopt(startAt, startBits === 0 ? 0 : startAccumulator >>> (32 - startBits), startBits);
    return index;
  }
}
