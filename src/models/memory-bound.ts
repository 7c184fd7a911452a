import { LimitError } from '../errors/errors.ts';

/**
 * Counts the bytes of a model's growing arrays and stops before they would pass a bound, old and new array together
 * while one is copied to the other.
 */
export class MemoryBound {
  #bytes: number;
  #used = 0;

  constructor(bytes: number) {
    this.#bytes = bytes;
  }

  get bytes(): number {
    return this.#bytes;
  }

  /** Lowers the bound, where it is higher; undefined leaves it. */
  narrow(bytes: number | undefined): void {
    if (bytes !== undefined) this.#bytes = Math.min(this.#bytes, bytes);
  }

  get usedBytes(): number {
    return this.#used;
  }

  /** Room for an array of `bytes`, in addition to all that is held. Throws LimitError. */
  claim(bytes: number): void {
    if (this.#used + bytes > this.bytes) {
      throw new LimitError('the contexts of this model need more memory than it may take', {
        expected: `at most ${Math.round(this.bytes / 2 ** 20)} MiB`,
        got: `${Math.round((this.#used + bytes) / 2 ** 20)} MiB`,
        advice: 'Take a lower order, or code a smaller part of the data at once.',
      });
    }
    this.#used += bytes;
  }

  release(bytes: number): void {
    this.#used -= bytes;
  }

  /** A copy of `array` with room for `length` words. */
  grow(array: Uint32Array, length: number): Uint32Array<ArrayBuffer> {
    this.claim(4 * length);
    const grown = new Uint32Array(length);
    grown.set(array);
    this.release(array.byteLength);
    return grown;
  }
}

/** The bound of every order-k model here; order 4 on 8 MiB of random bytes peaks below it. */
export const MODEL_MEMORY_BYTES = 900 * 2 ** 20;
