/** Symbols after which the older ones count half: see {@link RunningMean}. */
const WINDOW = 64;

/** Weight, in symbols, with which a mean of the train split enters. */
const TRAINED_WEIGHT = 16;

/**
 * Mean of the recent symbols as two integers, sum and count; both are halved when the count reaches 64, so that old
 * symbols fade. Sums stay below 64 · 2^24 = 2^30.
 *
 * Source: M. J. Weinberger, G. Seroussi, G. Sapiro, IEEE Trans. Image Processing 9(8), 2000, section III (start value, halving).
 */
export class RunningMean {
  sum: number;
  count: number;
  readonly #startSum: number;
  readonly #startCount: number;

  /**
   * @param alphabetSize  m, which tells how large symbols may be before any was met: the paper starts with a sum of sizes of
   *                      max(2, ⌊(m + 32) / 64⌋) and a count of 1; folded residues are twice their size
   * @param trained       sum and count over the train split
   */
  constructor(alphabetSize: number, trained?: { readonly sum: number; readonly count: number }) {
    if (trained === undefined || trained.count === 0) {
      this.#startSum = 2 * Math.max(2, Math.floor((alphabetSize + 32) / 64));
      this.#startCount = 1;
    } else {
      this.#startSum = Math.floor((trained.sum * TRAINED_WEIGHT) / trained.count);
      this.#startCount = TRAINED_WEIGHT;
    }
    this.sum = this.#startSum;
    this.count = this.#startCount;
  }

  restart(): void {
    this.sum = this.#startSum;
    this.count = this.#startCount;
  }

  add(symbol: number): void {
    this.sum += symbol;
    if (++this.count === WINDOW) {
      this.sum >>>= 1;
      this.count >>>= 1;
    }
  }
}
