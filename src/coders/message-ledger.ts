import type { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import type { Coded, IntegerAccount } from './contract.ts';

/**
 * Books the bits of one unit while it is coded, and checks each message: what was booked must be what the writer got.
 *
 * An encoder adds to the public fields while it codes a message and calls {@link close} at its end.
 */
export class MessageLedger {
  writtenBits = 0;
  endingBits = 0;
  tableBits = 0;
  indexBits = 0;
  framingBits = 0;
  checkBits = 0;
  /** Real payload, summed over messages. */
  payloadBits = 0;

  readonly #align: number;
  readonly #total: IntegerAccount = {
    writtenBits: 0,
    endingBits: 0,
    paddingBits: 0,
    tableBits: 0,
    indexBits: 0,
    framingBits: 0,
    checkBits: 0,
  };
  #ends = new Float64Array(16);
  #count = 0;
  #start = 0;

  /** @param align  multiple that each message is padded to, in bits */
  constructor(align: number) {
    this.#align = align;
  }

  /** Ends a message: pads, checks the integers, remembers the end. Nothing is allocated but for growth by doubling. */
  close(writer: BitWriter): void {
    const padding = writer.padTo(this.#align);
    const carried = writer.position - this.#start;
    const booked =
      this.writtenBits +
      this.endingBits +
      padding +
      this.tableBits +
      this.indexBits +
      this.framingBits +
      this.checkBits;
    if (booked !== carried) {
      throw new BugError('the bits booked for a message are not the bits written', {
        messageIndex: this.#count,
        expected: `${carried} bits, as written`,
        got: `${booked} bits: written ${this.writtenBits}, ending ${this.endingBits}, padding ${padding}, tables ${this.tableBits}, index ${this.indexBits}, framing ${this.framingBits}, check ${this.checkBits}`,
      });
    }
    const total = this.#total;
    total.writtenBits += this.writtenBits;
    total.endingBits += this.endingBits;
    total.paddingBits += padding;
    total.tableBits += this.tableBits;
    total.indexBits += this.indexBits;
    total.framingBits += this.framingBits;
    total.checkBits += this.checkBits;
    this.writtenBits = 0;
    this.endingBits = 0;
    this.tableBits = 0;
    this.indexBits = 0;
    this.framingBits = 0;
    this.checkBits = 0;
    if (this.#count === this.#ends.length) this.#grow(this.#count * 2);
    this.#start = writer.position;
    this.#ends[this.#count++] = this.#start;
    if (writer.shouldDrain) writer.drain();
  }

  #grow(capacity: number): void {
    const grown = new Float64Array(capacity);
    grown.set(this.#ends.subarray(0, this.#count));
    this.#ends = grown;
  }

  /** Messages closed so far. */
  get messageCount(): number {
    return this.#count;
  }

  /**
   * Room for the ends of `count` more messages, for a kernel that writes many at once: its entries from
   * {@link messageCount} on take them, in bits; {@link closeMany} books the messages.
   */
  roomForEnds(count: number): Float64Array {
    const needed = this.#count + count;
    if (needed > this.#ends.length)
      this.#grow(this.#count === 0 ? needed : Math.max(needed, this.#count * 2));
    return this.#ends;
  }

  /** Books `count` messages whose ends stand in {@link roomForEnds}; the sums of their bits must be what was written. */
  closeMany(
    writer: BitWriter,
    count: number,
    sums: {
      readonly writtenBits: number;
      readonly framingBits: number;
      readonly paddingBits: number;
    },
  ): void {
    if (count === 0) return;
    const { writtenBits, framingBits, paddingBits } = sums;
    const end = this.#ends[this.#count + count - 1];
    if (writer.position !== end || writtenBits + framingBits + paddingBits !== end - this.#start) {
      throw new BugError('the bits booked for many messages are not the bits written', {
        messageIndex: this.#count,
        expected: `${writer.position - this.#start} bits, as written`,
        got: `${end - this.#start} bits to the last end: written ${writtenBits}, padding ${paddingBits}, framing ${framingBits}`,
      });
    }
    const total = this.#total;
    total.writtenBits += writtenBits;
    total.framingBits += framingBits;
    total.paddingBits += paddingBits;
    this.#count += count;
    this.#start = end;
    if (writer.shouldDrain) writer.drain();
  }

  /** What the encoder gives back; ends the writer. */
  finish(writer: BitWriter): Coded {
    const { bytes, bitLength } = writer.finish();
    if (bitLength !== this.#start) {
      throw new BugError('bits were written after the last message', {
        expected: `${this.#start} bits`,
        got: `${bitLength} bits`,
      });
    }
    return {
      bytes,
      messageEndsBits:
        this.#count === this.#ends.length ? this.#ends : this.#ends.slice(0, this.#count),
      account: { ...this.#total },
      payloadBits: this.payloadBits,
    };
  }
}
