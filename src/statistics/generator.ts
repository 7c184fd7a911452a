import seedrandom from 'seedrandom';
import { InputError } from '../errors/errors.ts';

/**
 * Pseudo-random numbers that a seed determines, the same on every machine.
 *
 * Source: the Alea generator (J. Baagøe) of the seedrandom library; integers by rejection, so that every value of a range
 * is equally likely.
 */
export class SeededGenerator {
  readonly #draw: seedrandom.PRNG;

  constructor(seed: number | string) {
    this.#draw = seedrandom.alea(String(seed));
  }

  /** A number x with 0 ≤ x < 1, in steps of 2^−32. */
  real(): number {
    return this.#draw();
  }

  /**
   * An integer from `low` to `high`, both included.
   * @throws InputError unless both are safe integers, low ≤ high, and the range holds at most 2^32 values
   */
  integer(low: number, high: number): number {
    const span = high - low + 1;
    if (!Number.isSafeInteger(low) || !Number.isSafeInteger(high) || span < 1 || span > 2 ** 32) {
      throw new InputError('a random integer was asked for from an impossible range', {
        expected: 'safe integers low ≤ high with at most 2^32 values between',
        got: `${low} to ${high}`,
      });
    }
    // Draws at or above the largest multiple of the span would favour the low values.
    const limit = 2 ** 32 - (2 ** 32 % span);
    let draw = this.#draw.int32() >>> 0;
    while (draw >= limit) draw = this.#draw.int32() >>> 0;
    return low + (draw % span);
  }
}
