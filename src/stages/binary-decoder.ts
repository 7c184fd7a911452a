import type { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { DECISION_TOTAL, type DecisionSource } from '../models/binary-decision.ts';
import { WHOLE } from './binary-encoder.ts';
import { endingByZeros, endingForAny, rangePrecision } from './range-precision.ts';

const PRECISION = rangePrecision(32);

/**
 * The other end of {@link BinaryEncoder}. Bits past the reader's limit are zeros, at most 32 of them: an honest message
 * never needs more.
 */
export class BinaryDecoder implements DecisionSource {
  readonly #reader: BitReader;
  #low = 0;
  #high = WHOLE - 1;
  #code = 0;
  /** Position of the next bit to read. */
  #next = 0;
  #start = 0;

  constructor(reader: BitReader) {
    this.#reader = reader;
  }

  /** Starts a message at the reader's position, up to its limit. */
  begin(): void {
    this.#start = this.#reader.position;
    this.#next = this.#start;
    this.#low = 0;
    this.#high = WHOLE - 1;
    this.#code = 0;
    for (let i = 0; i < 4; i++) this.#code = this.#code * 256 + this.#byte();
  }

  take(ones: number): number {
    let low = this.#low;
    let high = this.#high;
    const split = low + Math.floor(((high - low) * ones) / DECISION_TOTAL);
    const bit = this.#code <= split ? 1 : 0;
    if (bit === 1) high = split;
    else low = split + 1;
    while ((low ^ high) >>> 24 === 0) {
      low = (low << 8) >>> 0;
      high = ((high << 8) | 0xff) >>> 0;
      this.#code = ((this.#code << 8) | this.#byte()) >>> 0;
    }
    this.#low = low;
    this.#high = high;
    return bit;
  }

  /**
   * The bit where the message's own bits end, after its last decision. The reader is left at the message's start.
   * @param continuation  as the encoder's
   */
  end(continuation: 'zeros' | 'any'): number {
    const range = this.#high - this.#low + 1;
    const bits =
      continuation === 'zeros'
        ? endingByZeros(PRECISION, this.#low, range)
        : endingForAny(PRECISION, this.#low, range);
    return this.#next - 32 + bits;
  }

  #byte(): number {
    const reader = this.#reader;
    if (this.#next + 8 > reader.limit + 32) {
      throw new CorruptStreamError('the coded bytes end too early', {
        bitOffset: reader.limit,
        expected: 'a message whose decisions fit its bits',
        got: 'the end of the message',
        advice: 'The bytes were cut or altered, or belong to another coder.',
      });
    }
    reader.position = this.#next;
    const byte = reader.peekBits(8);
    reader.position = this.#start;
    this.#next += 8;
    return byte;
  }
}
