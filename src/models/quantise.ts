import { BugError } from '../errors/errors.ts';

/**
 * Brings weights to integer frequencies with a given total, close to the least code length, with integers and exactly
 * rounded quotients only.
 *
 * Each weight gets its share rounded down, at least 1; where shares below 1 had to be raised, the others share what is
 * left, until nothing changes. What rounding left over goes, one each, to the entries that gain most from one more: largest
 * w ÷ (2f + 1), which orders w · log2((f + 1) ÷ f) to within a few per cent; ties to the earlier entry.
 */
export class Quantiser {
  #order = new Uint32Array(64);
  #gain = new Float64Array(64);

  /**
   * Fills `frequencies[from … to − 1]` from `weights` at the same places.
   * @param weights  integers ≥ 1
   * @param total    at least to − from
   */
  quantise(
    weights: Float64Array,
    frequencies: Uint32Array | Float64Array,
    from: number,
    to: number,
    total: number,
  ): void {
    const count = to - from;
    if (count === 0) return;
    if (total < count) throw new BugError('a total is too small for its frequencies');
    let weightLeft = 0;
    for (let i = from; i < to; i++) {
      weightLeft += weights[i];
      frequencies[i] = 0;
    }
    let share = total;
    for (let changed = true; changed; ) {
      changed = false;
      let weightRaised = 0;
      let raised = 0;
      for (let i = from; i < to; i++) {
        if (frequencies[i] === 0 && weights[i] * share < weightLeft) {
          frequencies[i] = 1;
          weightRaised += weights[i];
          raised++;
          changed = true;
        }
      }
      weightLeft -= weightRaised;
      share -= raised;
    }
    let left = total;
    if (this.#order.length < count) {
      this.#order = new Uint32Array(2 * count);
      this.#gain = new Float64Array(2 * count);
    }
    const gain = this.#gain;
    for (let i = from; i < to; i++) {
      if (frequencies[i] === 0) frequencies[i] = Math.floor((weights[i] * share) / weightLeft);
      left -= frequencies[i];
      gain[i - from] = weights[i] / (2 * frequencies[i] + 1);
    }
    if (left === 0) return;
    if (left < 0 || left > count) throw new BugError('frequencies do not add up to their total');
    this.#raiseBest(frequencies, from, count, left);
  }

  /** Adds 1 to the `left` entries of largest gain. */
  #raiseBest(
    frequencies: Uint32Array | Float64Array,
    from: number,
    count: number,
    left: number,
  ): void {
    const order = this.#order.subarray(0, count);
    const gain = this.#gain;
    for (let i = 0; i < count; i++) order[i] = i;
    order.sort((a, b) => gain[b] - gain[a] || a - b);
    for (let i = 0; i < left; i++) frequencies[from + order[i]]++;
  }
}
