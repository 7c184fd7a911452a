import type { OperationTally } from '../models/counting-tally.ts';
import type { IntervalSink } from '../models/interval.ts';
import type { RangeEncoder } from './range-encoder.ts';

/**
 * Hands intervals to a range encoder and counts what it, and the decoder at the other end, do for each.
 *
 * Encoder: 1 divide (range by total), 2 multiplies (step by low and by frequency); branches: 1 whether a carry runs, 1 for each
 * byte that it looks at, and the test of the shifting loop, bytes + 1 times. Decoder: 2 divides (range by total, code by
 * step), 2 multiplies; branches: 1 whether the target lies in the total, bytes + 1 of the loop. Both ranges are the same at
 * every step, so the bytes shifted are too.
 */
export class CountingRange implements IntervalSink {
  readonly #stage: RangeEncoder;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;

  constructor(stage: RangeEncoder, encoder: OperationTally, decoder: OperationTally) {
    this.#stage = stage;
    this.#encoder = encoder;
    this.#decoder = decoder;
  }

  put(low: number, frequency: number, total: number): void {
    const stage = this.#stage;
    const shiftedBefore = stage.shiftedBytes;
    const carriedBefore = stage.carriedBytes;
    stage.put(low, frequency, total);
    const shifted = stage.shiftedBytes - shiftedBefore;
    this.#encoder.divides += 1;
    this.#encoder.multiplies += 2;
    this.#encoder.branches += 2 + shifted + (stage.carriedBytes - carriedBefore);
    this.#decoder.divides += 2;
    this.#decoder.multiplies += 2;
    this.#decoder.branches += 2 + shifted;
  }
}
