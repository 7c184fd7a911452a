import type { IntervalSink, IntervalSource } from './interval.ts';

/** What a count grows by; symbols not met yet weigh 1. */
const STEP = 24;
const LARGEST_SUM = 2 ** 13;

/**
 * Adaptive frequencies over a few symbols, for the parts of a sent table: symbols are found by walking.
 *
 * Memory: 2 bytes a symbol.
 */
export class SmallModel {
  readonly #weights: Uint16Array;
  #sum: number;

  constructor(size: number) {
    this.#weights = new Uint16Array(size).fill(1);
    this.#sum = size;
  }

  encode(symbol: number, sink: IntervalSink): void {
    const weights = this.#weights;
    let low = 0;
    for (let i = 0; i < symbol; i++) low += weights[i];
    sink.put(low, weights[symbol], this.#sum);
    this.#count(symbol);
  }

  decode(source: IntervalSource): number {
    const weights = this.#weights;
    const target = source.target(this.#sum);
    let symbol = 0;
    let low = 0;
    while (low + weights[symbol] <= target) low += weights[symbol++];
    source.take(low, weights[symbol]);
    this.#count(symbol);
    return symbol;
  }

  #count(symbol: number): void {
    this.#weights[symbol] += STEP;
    this.#sum += STEP;
    if (this.#sum <= LARGEST_SUM) return;
    this.#sum = 0;
    for (let i = 0; i < this.#weights.length; i++) {
      this.#weights[i] = (this.#weights[i] + 1) >>> 1;
      this.#sum += this.#weights[i];
    }
  }
}

/** Bits of the binary form of an integer 0 … 2^32 − 1; 0 for 0. */
export const bitLength = (value: number): number => 32 - Math.clz32(value);

/** Writes the low `width` bits of a value below 2^32 as equally likely. */
export function putBits(sink: IntervalSink, value: number, width: number): void {
  for (let left = width; left > 0; ) {
    const take = Math.min(16, left);
    left -= take;
    sink.put(Math.floor(value / 2 ** left) % 2 ** take, 1, 2 ** take);
  }
}

export function takeBits(source: IntervalSource, width: number): number {
  let value = 0;
  for (let left = width; left > 0; ) {
    const take = Math.min(16, left);
    left -= take;
    const piece = source.target(2 ** take);
    source.take(piece, 1);
    value = value * 2 ** take + piece;
  }
  return value;
}

/** Integers 0 … 2^32 − 1: the bit length adaptively, the bits below the leading 1 as they are. */
export class IntegerModel {
  readonly #lengths = new SmallModel(33);

  encode(value: number, sink: IntervalSink): void {
    const length = bitLength(value);
    this.#lengths.encode(length, sink);
    if (length > 1) putBits(sink, value - 2 ** (length - 1), length - 1);
  }

  decode(source: IntervalSource): number {
    const length = this.#lengths.decode(source);
    return length < 2 ? length : 2 ** (length - 1) + takeBits(source, length - 1);
  }
}
