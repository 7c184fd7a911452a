import type { BitWriter } from '../bits/bit-writer.ts';
import { DECISION_TOTAL, type DecisionSink } from '../models/binary-decision.ts';
import { endingByZeros, endingForAny, rangePrecision } from './range-precision.ts';

const PRECISION = rangePrecision(32);
/** Width of the interval while nothing is coded. */
export const WHOLE = 2 ** 32;

/**
 * Arithmetic coding of single bits: the interval low … high of 32-bit integers, both ends included, is split in proportion
 * to the probability of a 1, the lower part being the 1's; bytes on which both ends agree are shifted out, so no carry
 * ever runs back.
 *
 * Invariants: 0 ≤ low ≤ high < 2^32; before each bit their leading bytes differ, so high > low and either part holds at
 * least one integer. Where low and high lie close around a leading byte's step, probabilities are coded coarsely for a few
 * bits: the loss is part of the payload, and about 10^−5 bit a decision on average.
 *
 * One instance codes many messages: {@link begin}, bits, {@link end}. After `end` the public fields hold what the
 * message cost.
 * Source: I. H. Witten, R. M. Neal, J. G. Cleary, "Arithmetic coding for data compression", CACM 30(6), 1987 (incremental
 * coding); bytes in place of bits are common practice, no source.
 */
export class BinaryEncoder implements DecisionSink {
  /** Bits shifted out: whole bytes. */
  writtenBits = 0;
  endingBits = 0;
  /** −log2(final interval ÷ initial interval), bytes shifted out counted. */
  payloadBits = 0;

  readonly #writer: BitWriter;
  #bytes = new Uint8Array(1024);
  #length = 0;
  #low = 0;
  #high = WHOLE - 1;

  constructor(writer: BitWriter) {
    this.#writer = writer;
  }

  begin(): void {
    this.#length = 0;
    this.#low = 0;
    this.#high = WHOLE - 1;
  }

  put(bit: number, ones: number): void {
    let low = this.#low;
    let high = this.#high;
    const split = low + Math.floor(((high - low) * ones) / DECISION_TOTAL);
    if (bit === 1) high = split;
    else low = split + 1;
    while ((low ^ high) >>> 24 === 0) {
      if (this.#length === this.#bytes.length) this.#grow();
      this.#bytes[this.#length++] = high >>> 24;
      low = (low << 8) >>> 0;
      high = ((high << 8) | 0xff) >>> 0;
    }
    this.#low = low;
    this.#high = high;
  }

  /**
   * Ends the message and hands its bits to the writer.
   * @param continuation  what the decoder will read after the last bit: `zeros` where it knows the message's end,
   *                      `any` where it has to find the end itself
   */
  end(continuation: 'zeros' | 'any'): void {
    const low = this.#low;
    const range = this.#high - low + 1;
    const byZeros = continuation === 'zeros';
    const bits = byZeros
      ? endingByZeros(PRECISION, low, range)
      : endingForAny(PRECISION, low, range);
    this.writtenBits = 8 * this.#length;
    this.endingBits = bits;
    this.payloadBits = 8 * this.#length + 32 - Math.log2(range);
    const unit = 2 ** (32 - bits);
    this.#writer.writeBytes(this.#bytes, 0, this.#length);
    this.#writer.writeBits(byZeros ? Math.floor(this.#high / unit) : Math.ceil(low / unit), bits);
  }

  #grow(): void {
    const grown = new Uint8Array(2 * this.#bytes.length);
    grown.set(this.#bytes);
    this.#bytes = grown;
  }
}
