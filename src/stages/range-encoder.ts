import type { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import type { IntervalSink } from '../models/interval.ts';
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
 * A message can be taken back to a mark: what lay before it then ends as if nothing had followed.
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
  /** Bytes that carries have looked at since the encoder was made, for counting operations. */
  carriedBytes = 0;

  readonly #precision: RangePrecision;
  readonly #top: number;
  readonly #shiftBelow: number;
  readonly #perShift: number;
  readonly #writer: BitWriter;
  /** The writer's own buffer while the message starts on a byte, else bytes kept until its end. */
  #bytes: Uint8Array;
  #kept = new Uint8Array(0);
  #direct = true;
  #start = 0;
  #at = 0;
  /** Bytes of the message that {@link settle} has handed over. */
  #settledBytes = 0;
  #low = 0;
  #range = 0;
  #markedAt = 0;
  #markedLow = 0;
  #markedRange = 0;
  /** A carry has changed bytes before the mark. At most one can: what follows them stays below their last place. */
  #carryPassedMark = false;

  constructor(writer: BitWriter, bits: RangeBits) {
    this.#writer = writer;
    this.#precision = rangePrecision(bits);
    this.#top = this.#precision.top;
    this.#shiftBelow = this.#precision.shiftBelow;
    this.#perShift = 1 / this.#shiftBelow;
    this.#bytes = writer.bytes;
  }

  /** The coding interval: bytes shifted out so far, and low and range of what follows them. For tests and screens. */
  state(): { readonly shifted: Uint8Array; readonly low: number; readonly range: number } {
    const shifted = this.#bytes.slice(this.#start, this.#at);
    return { shifted, low: this.#low, range: this.#range };
  }

  /** Bytes of the message shifted out so far. */
  get shiftedBytes(): number {
    return this.#settledBytes + this.#at - this.#start;
  }

  /**
   * Hands the writer the bytes of the message that no carry can change any more, and lets it drain, so that a message may be
   * longer than memory. The state is marked anew.
   *
   * A carry raises the last byte that is not 255, and each byte once at most: those before it stay as they are.
   */
  settle(): void {
    const bytes = this.#bytes;
    let settled = this.#at;
    while (settled > this.#start && bytes[settled - 1] === 255) settled--;
    settled = Math.max(this.#start, settled - 1);
    const count = settled - this.#start;
    if (count === 0) return;
    this.#settledBytes += count;
    const writer = this.#writer;
    if (this.#direct) {
      writer.adopt(settled, 0, 0);
      writer.drain();
      bytes.copyWithin(writer.byteLength, settled, this.#at);
      this.#start = writer.byteLength;
    } else {
      writer.writeBytes(bytes, 0, settled);
      writer.drain();
      bytes.copyWithin(0, settled, this.#at);
      this.#start = 0;
    }
    this.#at = this.#start + (this.#at - settled);
    this.mark();
  }

  /** Starts a message at the writer's position; the writer is not to be used until {@link end}. */
  begin(): void {
    this.#direct = this.#writer.pendingBits === 0;
    this.#start = this.#direct ? this.#writer.byteLength : 0;
    this.#at = this.#start;
    this.#bytes = this.#direct ? this.#writer.bytes : this.#kept;
    this.#beginInterval();
  }

  /** As {@link begin}, but the writer stays free until {@link end}; a message begun before and not ended is forgotten. */
  beginApart(): void {
    this.#direct = false;
    this.#start = 0;
    this.#at = 0;
    this.#bytes = this.#kept;
    this.#beginInterval();
  }

  #beginInterval(): void {
    this.#settledBytes = 0;
    this.#low = 0;
    this.#range = this.#precision.initialRange;
    this.mark();
  }

  /** Remembers the state, in place of the mark before; every message begins with one. */
  mark(): void {
    this.#markedAt = this.#at;
    this.#markedLow = this.#low;
    this.#markedRange = this.#range;
    this.#carryPassedMark = false;
  }

  /** Back to the last mark. */
  restore(): void {
    if (this.#carryPassedMark) {
      const bytes = this.#bytes;
      let at = this.#markedAt - 1;
      while (bytes[at] === 0) bytes[at--] = 255;
      bytes[at]--;
    }
    this.#at = this.#markedAt;
    this.#low = this.#markedLow;
    this.#range = this.#markedRange;
    this.#carryPassedMark = false;
  }

  /** Bits of the code string, were the message to end here. */
  bitsIfEnded(continuation: 'zeros' | 'any'): number {
    return 8 * this.shiftedBytes + this.#endingBitsFor(continuation);
  }

  #endingBitsFor(continuation: 'zeros' | 'any'): number {
    return continuation === 'zeros'
      ? endingByZeros(this.#precision, this.#low, this.#range)
      : endingForAny(this.#precision, this.#low, this.#range);
  }

  /** Codes one interval; trusts the model's promises. */
  put(low: number, frequency: number, total: number): void {
    if (this.#at + BYTES_PER_INTERVAL > this.#bytes.length) this.#makeRoom();
    const step = Math.floor(this.#range / total);
    let lowest = this.#low + step * low;
    let range = step * frequency;
    if (lowest >= this.#top) {
      lowest -= this.#top;
      this.#carry();
    }
    const shiftBelow = this.#shiftBelow;
    while (range < shiftBelow) {
      // The factor is a power of two: as exact as the quotient, and faster.
      const byte = Math.floor(lowest * this.#perShift);
      this.#bytes[this.#at++] = byte;
      lowest = (lowest - byte * shiftBelow) * 256;
      range *= 256;
    }
    this.#low = lowest;
    this.#range = range;
  }

  /**
   * Ends the message and hands its bits to the writer.
   * @param continuation  what the decoder will read after the last bit: `zeros` where it knows the message's end,
   *                      `any` where it has to find the end itself
   */
  end(continuation: 'zeros' | 'any'): void {
    const precision = this.#precision;
    const byZeros = continuation === 'zeros';
    const bits = this.#endingBitsFor(continuation);
    const shifted = this.shiftedBytes;
    this.writtenBits = 8 * shifted;
    this.endingBits = bits;
    this.payloadBits = 8 * shifted + precision.initialBits - Math.log2(this.#range);
    const unit = 2 ** (precision.bits - bits);
    this.#low = byZeros
      ? Math.floor((this.#low + this.#range - 1) / unit) * unit
      : Math.ceil(this.#low / unit) * unit;
    if (this.#low >= precision.top) {
      this.#low -= precision.top;
      this.#carry();
    }
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

  #makeRoom(): void {
    const more = Math.max(1024, this.#at - this.#start);
    if (this.#direct) {
      // The writer copies up to its byteLength: what this message holds so far is handed over first.
      this.#writer.adopt(this.#at, 0, 0);
      this.#writer.reserve(more);
      this.#bytes = this.#writer.bytes;
    } else {
      this.#kept = new Uint8Array(this.#at + more);
      this.#kept.set(this.#bytes.subarray(0, this.#at));
      this.#bytes = this.#kept;
    }
  }

  #carry(): void {
    const bytes = this.#bytes;
    let at = this.#at - 1;
    while (at >= this.#start && bytes[at] === 255) bytes[at--] = 0;
    if (at < this.#start) throw new BugError('a carry ran out of its message');
    bytes[at]++;
    this.carriedBytes += this.#at - at;
    if (at < this.#markedAt) this.#carryPassedMark = true;
  }
}
