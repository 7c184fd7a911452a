import type { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import { checkInterval, type IntervalSink, type IntervalTape } from '../models/interval.ts';
import {
  endingByZeros,
  endingForAny,
  type RangeBits,
  type RangePrecision,
  rangePrecision,
} from './range-precision.ts';

/** An interval narrows the range by at most 22 bits, so three bytes are shifted out at most. */
const BYTES_PER_INTERVAL = 3;

/**
 * Arithmetic coding by intervals: `r = ⌊range / total⌋, low += r · cumulative, range = r · frequency`, a byte shifted out
 * while the range is below 2^(bits − 8). A carry walks back over the bytes of the same message.
 *
 * One instance codes many messages: {@link begin}, intervals, {@link end}; each has a code string of its own, at any bit
 * position of the writer. After `end` the public fields hold what the message cost; nothing is allocated per message.
 *
 * Precision: what ⌊ ⌋ loses is part of the payload. At 48 bits it is below 6 bits in a million intervals for any total to
 * 2^22; at 32 bits below 1.61 · n · T / 2^24 bits for n intervals of totals to T.
 *
 * Source: G. N. N. Martin, "Range encoding", Video & Data Recording Conference, 1979; J. Rissanen, G. G. Langdon, IBM J.
 * Res. Dev. 23(2), 1979.
 */
export class RangeEncoder implements IntervalSink {
  /** Bits shifted out: whole bytes. */
  writtenBits = 0;
  /** Bits of the ending. */
  endingBits = 0;
  /** −log2(final range ÷ initial range), bytes shifted out counted. */
  payloadBits = 0;

  readonly #precision: RangePrecision;
  readonly #writer: BitWriter;
  /** The writer's own buffer while the message starts on a byte, else bytes kept until its end. */
  #bytes: Uint8Array;
  #kept = new Uint8Array(0);
  #direct = true;
  #start = 0;
  #at = 0;
  #low = 0;
  #range = 0;

  constructor(writer: BitWriter, bits: RangeBits) {
    this.#writer = writer;
    this.#precision = rangePrecision(bits);
    this.#bytes = writer.bytes;
  }

  /** Lower end and width of the interval; with the bytes shifted out, the whole state. */
  get interval(): { readonly low: number; readonly range: number } {
    return { low: this.#low, range: this.#range };
  }

  /** Starts a message at the writer's position; the writer is not to be used until {@link end}. */
  begin(): void {
    this.#direct = this.#writer.pendingBits === 0;
    this.#start = this.#direct ? this.#writer.byteLength : 0;
    this.#at = this.#start;
    this.#bytes = this.#direct ? this.#writer.bytes : this.#kept;
    this.#low = 0;
    this.#range = this.#precision.initialRange;
  }

  /** Codes one interval. Throws PromiseError when the model breaks a promise. */
  put(low: number, frequency: number, total: number): void {
    checkInterval(low, frequency, total);
    this.#makeRoom(BYTES_PER_INTERVAL);
    const step = Math.floor(this.#range / total);
    this.#low += step * low;
    this.#range = step * frequency;
    if (this.#low >= this.#precision.top) this.#carry();
    while (this.#range < this.#precision.shiftBelow) {
      const byte = Math.floor(this.#low / this.#precision.shiftBelow);
      this.#bytes[this.#at++] = byte;
      this.#low = (this.#low - byte * this.#precision.shiftBelow) * 256;
      this.#range *= 256;
    }
  }

  /** Codes and clears a tape: the same bytes as {@link put} for each of its intervals, unchecked and faster. */
  putTape(tape: IntervalTape): void {
    const { words, length } = tape;
    this.#makeRoom((length / 3) * BYTES_PER_INTERVAL);
    const { top, shiftBelow } = this.#precision;
    const bytes = this.#bytes;
    let at = this.#at;
    let low = this.#low;
    let range = this.#range;
    for (let i = 0; i < length; i += 3) {
      const step = Math.floor(range / words[i + 2]);
      low += step * words[i];
      range = step * words[i + 1];
      if (low >= top) {
        this.#low = low;
        this.#at = at;
        this.#carry();
        low = this.#low;
      }
      while (range < shiftBelow) {
        const byte = Math.floor(low / shiftBelow);
        bytes[at++] = byte;
        low = (low - byte * shiftBelow) * 256;
        range *= 256;
      }
    }
    this.#at = at;
    this.#low = low;
    this.#range = range;
    tape.clear();
  }

  /**
   * Ends the message and hands its bits to the writer.
   * @param continuation  what the decoder will read after the last bit: `zeros` where it knows the message's end,
   *                      `any` where it has to find the end itself
   */
  end(continuation: 'zeros' | 'any'): void {
    const precision = this.#precision;
    const byZeros = continuation === 'zeros';
    const bits = byZeros
      ? endingByZeros(precision, this.#low, this.#range)
      : endingForAny(precision, this.#low, this.#range);
    const shifted = this.#at - this.#start;
    this.writtenBits = 8 * shifted;
    this.endingBits = bits;
    this.payloadBits = 8 * shifted + precision.initialBits - Math.log2(this.#range);
    const unit = 2 ** (precision.bits - bits);
    this.#low = byZeros
      ? Math.floor((this.#low + this.#range - 1) / unit) * unit
      : Math.ceil(this.#low / unit) * unit;
    if (this.#low >= precision.top) this.#carry();
    const writer = this.#writer;
    if (this.#direct) writer.adopt(this.#at, 0, 0);
    else writer.writeBytes(this.#bytes, 0, this.#at);
    const ending = this.#low / unit;
    if (bits > 32) {
      writer.writeBits(Math.floor(ending / 2 ** 32), bits - 32);
      writer.writeBits(ending % 2 ** 32, 32);
    } else {
      writer.writeBits(ending, bits);
    }
  }

  #makeRoom(count: number): void {
    if (this.#at + count <= this.#bytes.length) return;
    if (this.#direct) {
      // The writer counts from its byteLength; what this message holds so far is handed over for the copy.
      this.#writer.adopt(this.#at, 0, 0);
      this.#writer.reserve(count);
      this.#bytes = this.#writer.bytes;
    } else {
      this.#kept = new Uint8Array(Math.max(1024, this.#at + count, 2 * this.#kept.length));
      this.#kept.set(this.#bytes.subarray(0, this.#at));
      this.#bytes = this.#kept;
    }
  }

  #carry(): void {
    this.#low -= this.#precision.top;
    const bytes = this.#bytes;
    let at = this.#at - 1;
    while (at >= this.#start && bytes[at] === 255) bytes[at--] = 0;
    if (at < this.#start) throw new BugError('a carry ran out of its message');
    bytes[at]++;
  }
}
