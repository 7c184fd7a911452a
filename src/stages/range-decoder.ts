import type { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import type { IntervalSource } from '../models/interval.ts';
import {
  endingByZeros,
  endingForAny,
  type RangeBits,
  type RangePrecision,
  rangePrecision,
} from './range-precision.ts';

/**
 * The other end of {@link RangeEncoder}.
 *
 * It keeps `code`, the code string's value less the interval's lower end. That lower end is needed only where a message
 * ends; there it follows from the bits last read, so the symbol loop does not carry it.
 *
 * Bits past the reader's limit are zeros, at most `bits` of them: an honest message never needs more.
 */
export class RangeDecoder implements IntervalSource {
  readonly #reader: BitReader;
  readonly #precision: RangePrecision;
  #code = 0;
  #range = 0;
  #step = 0;
  #start = 0;
  /** The next byte to read begins `#shift` bits after bit 8 · #next. */
  #next = 0;
  #shift = 0;
  /** Bytes before this one lie wholly before the limit. */
  #safe = 0;

  constructor(reader: BitReader, bits: RangeBits) {
    this.#reader = reader;
    this.#precision = rangePrecision(bits);
  }

  /** Starts a message at the reader's position, up to its limit. */
  begin(): void {
    const reader = this.#reader;
    this.#start = reader.position;
    this.#shift = this.#start % 8;
    this.#next = (this.#start - this.#shift) / 8;
    this.#safe = Math.floor((reader.limit - this.#shift) / 8);
    this.#range = this.#precision.initialRange;
    this.#code = 0;
    for (let i = 0; i < this.#precision.bits; i += 8) this.#code = this.#code * 256 + this.#byte();
  }

  target(total: number): number {
    const step = Math.floor(this.#range / total);
    this.#step = step;
    const target = Math.floor(this.#code / step);
    if (target >= total) this.#refuse();
    return target;
  }

  take(low: number, frequency: number): void {
    const shiftBelow = this.#precision.shiftBelow;
    let code = this.#code - this.#step * low;
    let range = this.#step * frequency;
    while (range < shiftBelow) {
      code = code * 256 + this.#byte();
      range *= 256;
    }
    this.#code = code;
    this.#range = range;
  }

  /**
   * The bit where the message's own bits end, after its last interval. The reader is left at the message's start, or, where
   * its bytes are a window that has moved on, at the window's.
   * @param continuation  as the encoder's
   */
  end(continuation: 'zeros' | 'any'): number {
    const { bits, top } = this.#precision;
    const reader = this.#reader;
    const endOfShifted = this.#next * 8 + this.#shift - bits;
    reader.position = endOfShifted;
    let window = reader.peekBits(bits - 16) * 2 ** 16;
    reader.position = endOfShifted + bits - 16;
    window += reader.peekBits(16);
    reader.position = this.#start;
    const low = window - this.#code + (window < this.#code ? top : 0);
    const endingBits =
      continuation === 'zeros'
        ? endingByZeros(this.#precision, low, this.#range)
        : endingForAny(this.#precision, low, this.#range);
    return endOfShifted + endingBits;
  }

  #byte(): number {
    const at = this.#next++;
    if (at >= this.#safe) return this.#byteNearLimit(at);
    const bytes = this.#reader.bytes;
    const shift = this.#shift;
    if (shift === 0) return bytes[at];
    return ((bytes[at] << shift) | (bytes[at + 1] >>> (8 - shift))) & 0xff;
  }

  #byteNearLimit(at: number): number {
    const reader = this.#reader;
    const moved = reader.refill(at);
    if (moved > 0) {
      this.#next -= moved;
      this.#start = Math.max(0, this.#start - 8 * moved);
      this.#safe = Math.floor((reader.limit - this.#shift) / 8);
      this.#next--;
      return this.#byte();
    }
    const position = at * 8 + this.#shift;
    if (position + 8 > reader.limit + this.#precision.bits) {
      throw new CorruptStreamError('the coded bytes end too early', {
        bitOffset: reader.limit,
        expected: 'a message whose intervals fit its bits',
        got: 'the end of the message',
        advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
      });
    }
    reader.position = position;
    const byte = reader.peekBits(8);
    reader.position = this.#start;
    return byte;
  }

  #refuse(): never {
    throw new CorruptStreamError('the coded bytes lie in no interval of the model', {
      bitOffset: this.#next * 8 + this.#shift - this.#precision.bits,
      advice: 'The bytes were cut or altered, or belong to another coder or other tables.',
    });
  }
}
