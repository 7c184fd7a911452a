import type { IntervalSink } from '../models/interval.ts';

/** Far above the smallest double, so that one more ratio of 2^−53 cannot reach denormals. */
const SMALL = 2 ** -900;

/**
 * Adds up −log2(frequency ÷ total): the code length of a model without a stage. Totals may be anything below 2^53.
 *
 * Ratios are multiplied, and the logarithm is taken only when the product is small: relative error below 10^−12 for 2^26
 * intervals.
 */
export class Meter implements IntervalSink {
  #bits = 0;
  #product = 1;

  put(_low: number, frequency: number, total: number): void {
    this.#product *= frequency / total;
    if (this.#product < SMALL) this.#settle();
  }

  /** The bits since the last call. */
  takeBits(): number {
    this.#settle();
    const bits = this.#bits;
    this.#bits = 0;
    return bits;
  }

  #settle(): void {
    this.#bits -= Math.log2(this.#product);
    this.#product = 1;
  }
}
