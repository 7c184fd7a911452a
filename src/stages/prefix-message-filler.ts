import type { BitWriter } from '../bits/bit-writer.ts';
import { shiftLeft, shiftRight } from '../bits/shift-bits.ts';
import { countWidth, countWord, type MessageRoom } from './message-room.ts';
import { type PrefixEncoder, WORD_BITS_AT_ONCE } from './prefix-encoder.ts';

/** Most symbols that are written before it is known that they fit. */
const MOST_SYMBOLS = 4096;
/** Share of the room, by the units of the message before, that is filled on trust. */
const TRUST = 0.97;
/** More padding than this does not go out in one store. */
const MOST_ALIGN_BITS = 32;
/** With words of a bit or more no count is above 2^16 − 2, and takes at most so many bits. */
const MOST_BUDGET_BITS = 2 ** 16 - 2;
const COUNT_BITS = 24;
/** Bytes, and messages, after which one run is over; one message more may follow. */
const RUN_BYTES = 2 ** 16;
const RUN_MESSAGES = 4096;
/** More than a count and padding take, and what is stored beyond the end. */
const FRAME_BYTES = 16;

/** Whether {@link PrefixMessageFiller} can write these words: each symbol has one, not an empty one. */
export function canFill(words: PrefixEncoder, { budgetBits, align }: MessageRoom): boolean {
  return (
    align <= MOST_ALIGN_BITS &&
    budgetBits <= MOST_BUDGET_BITS &&
    words.lengths.every((length) => length > 0 && length <= 32)
  );
}

/**
 * Fills messages with whole units, nearly all of them written once and never counted: as many as there is likely room for,
 * by the message before, go out at once. Where these are too many, the last ones are counted back; where there are too
 * few, the next are counted first. The words stand behind room for a count as long as that of the message before; where
 * the count is of another length, they are shifted.
 */
export class PrefixMessageFiller {
  /** Of the last run, in bits: words, counts and padding. */
  writtenBits = 0;
  framingBits = 0;
  paddingBits = 0;
  /** Units in the messages of the last run, and one past the last symbol of each message. */
  unitCount = 0;
  readonly symbolEnds = new Uint32Array(RUN_MESSAGES);
  readonly #words: PrefixEncoder;
  readonly #room: MessageRoom;
  /** Of the message before: bits of its count, and units for a bit; at first nothing is trusted. */
  #countBits = 0;
  #unitsPerBit = 0;

  /** What {@link canFill} grants. */
  constructor(words: PrefixEncoder, room: MessageRoom) {
    this.#words = words;
    this.#room = room;
  }

  /** Most messages of a run over so many units. */
  mostMessages(units: number): number {
    return Math.min(units, RUN_MESSAGES);
  }

  /**
   * Writes messages from unit `first` on, about 64 KiB of them, and gives their ends in bits to `endsBits[endsAt …]`.
   * It stops in front of a unit that does not fit even alone, and of a message that is not decided.
   * @param from  first symbol of unit `first`
   * @param last  no more units will come
   * @returns messages written
   */
  run(
    writer: BitWriter,
    symbols: Uint8Array,
    unitEnds: Uint32Array,
    first: number,
    from: number,
    last: boolean,
    endsBits: Float64Array,
    endsAt: number,
  ): number {
    const { budgetBits, align, unitSymbols } = this.#room;
    const { codes, lengths } = this.#words;
    const pairs = this.#words.pairs();
    const units = unitEnds.length;
    const { symbolEnds } = this;
    const surelyFits = budgetBits - COUNT_BITS;
    writer.reserve(
      Math.min(
        RUN_BYTES + (budgetBits >>> 3) + MOST_SYMBOLS * 4,
        (symbols.length - from) * 4 + (units - first) * FRAME_BYTES,
      ) + FRAME_BYTES,
    );
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
    let countBits = this.#countBits;
    let unitsPerBit = this.#unitsPerBit;
    let writtenBits = 0;
    let framingBits = 0;
    let paddingBits = 0;
    let messages = 0;
    // Where the message at hand begins.
    let start = first;
    let startSymbol = from;
    let startAt = at;
    let startBits = bits;
    let startAccumulator = accumulator;
    while (start < units && messages < RUN_MESSAGES && at <= lastStart) {
      view.setInt32(at, accumulator);
      bits += countBits;
      accumulator <<= (bits >>> 3) << 3;
      at += bits >>> 3;
      bits &= 7;
      const wordsFrom = at * 8 + bits;
      let contentBits = 0;
      let unit = start;
      let i = startSymbol;
      for (let isDecided = false; !isDecided; ) {
        let count = Math.min(Math.floor((budgetBits - contentBits) * unitsPerBit), units - unit);
        while (count > 1 && unitEnds[unit + count - 1] - i > MOST_SYMBOLS) count >>>= 1;
        let to = i;
        if (count > 1) {
          unit += count;
          to = unitEnds[unit - 1];
        } else {
          isDecided = true;
          for (let counted = contentBits; unit < units; unit++) {
            const end = unitEnds[unit];
            for (let j = to; j < end; j++) counted += lengths[symbols[j]];
            if (
              counted > surelyFits &&
              counted + countWidth(end - startSymbol, unitSymbols) > budgetBits
            )
              break;
            to = end;
          }
        }
        while (i < to) {
          let stop = to;
          if (pairs !== undefined) {
            for (const end = to - 1; i < end; i += 2) {
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
        }
        contentBits = at * 8 + bits - wordsFrom;
        while (
          unit > start &&
          contentBits > surelyFits &&
          contentBits + countWidth(i - startSymbol, unitSymbols) > budgetBits
        ) {
          isDecided = true;
          unit--;
          const end = unit === start ? startSymbol : unitEnds[unit - 1];
          for (; i > end; i--) contentBits -= lengths[symbols[i - 1]];
        }
      }
      if (unit === start || (unit === units && !last)) break;
      unitsPerBit = (TRUST * (unit - start)) / contentBits;
      writtenBits += contentBits;
      const symbolCount = i - startSymbol;
      const width = countWidth(symbolCount, unitSymbols);
      framingBits += width;
      // What is pending may go back to a byte that is stored already.
      view.setInt32(at, accumulator);
      const endBits = wordsFrom + contentBits + width - countBits;
      at = endBits >>> 3;
      bits = endBits & 7;
      if (unitSymbols > 0) {
        if (width !== countBits) {
          // What is pending from before stays where it is.
          view.setInt32(startAt, view.getInt32(startAt) & (-1 >>> startBits));
          if (width > countBits) shiftRight(view, startAt, at, width - countBits);
          else shiftLeft(view, startAt, at, countBits - width);
          countBits = width;
        }
        const word = countWord(symbolCount, unitSymbols) << (32 - startBits - width);
        view.setInt32(startAt, startAccumulator | word | view.getInt32(startAt));
      }
      // Padding may lie where bits stood that were counted back.
      accumulator = view.getInt32(at) & ~(-1 >>> bits);
      view.setInt32(at, accumulator);
      if (align <= 8) {
        const padding = -bits & (align - 1);
        paddingBits += padding;
        bits += padding;
        accumulator <<= (bits >>> 3) << 3;
      } else {
        const over = ((baseBytes + at) % alignBytes) * 8 + bits;
        const padding = over === 0 ? 0 : align - over;
        paddingBits += padding;
        bits += padding;
        accumulator = 0;
      }
      at += bits >>> 3;
      bits &= 7;
      endsBits[endsAt + messages] = baseBits + at * 8 + bits;
      symbolEnds[messages++] = i;
      start = unit;
      startSymbol = i;
      startAt = at;
      startBits = bits;
      startAccumulator = accumulator;
    }
    this.#countBits = countBits;
    this.#unitsPerBit = unitsPerBit;
    this.unitCount = start - first;
    this.writtenBits = writtenBits;
    this.framingBits = framingBits;
    this.paddingBits = paddingBits;
    writer.adopt(startAt, startBits === 0 ? 0 : startAccumulator >>> (32 - startBits), startBits);
    return messages;
  }
}
