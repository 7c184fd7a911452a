import { InputError, PromiseError } from '../errors/errors.ts';
import { limitedLengthCounts } from './code-lengths-limited.ts';

/** Length of a symbol that has no code word; 0 is the length of a lone symbol's empty word. */
export const ABSENT = 255;

/** Longest word that any coder here may use, in bits: a word fits one unsigned 32-bit integer. */
export const LONGEST_WORD_BITS = 32;

/** No unlimited code is deeper: 80 levels need the 80th Fibonacci number as total, above 2^53. */
const DEPTHS = 96;

/**
 * Fits code lengths of minimum redundancy, again and again, in buffers of its own, so that a coder
 * that fits each message allocates nothing.
 *
 * Cost: O(k log k) for k weights, and O(k · maxBits) more when the limit binds; 40 to 60 bytes of
 * memory a weight.
 * Source: D. A. Huffman, Proc. IRE 40(9), 1952; linear after sorting with two queues: J. van
 * Leeuwen, ICALP 1976. Limit: see code-lengths-limited.ts.
 */
export class CodeLengthFitter {
  #capacity = 0;
  #keys = new Float64Array(0);
  #order = new Uint32Array(0);
  #weights = new Float64Array(0);
  #merged = new Float64Array(0);
  #parents = new Uint32Array(0);
  #depths = new Uint8Array(0);
  readonly #lengthCounts = new Float64Array(DEPTHS);

  /**
   * Code lengths of `weights[0 … count − 1]` into `lengths`.
   *
   * Promises: the same on every machine; among equal weights the lower index has the shorter or the
   * same length; the Kraft sum is exactly 1 for count ≥ 2. A lone weight gets length 0: its word
   * carries nothing.
   * @param weights  positive integers, their sum below 2^53
   * @param maxBits  longest word, ⌈log2 count⌉ … 32 bits
   * @throws PromiseError for a weight that is not a positive integer; InputError when the sum is
   *   too large or the limit too low
   */
  fit(weights: Float64Array, count: number, maxBits: number, lengths: Uint8Array): void {
    if (count === 0) return;
    this.#sort(weights, count);
    if (count > 2 ** maxBits) {
      throw new InputError(`${count} symbols cannot all have words of at most ${maxBits} bits`, {
        expected: `at most ${2 ** maxBits} symbols`,
        got: String(count),
        advice: 'Give a larger maxbits.',
      });
    }
    if (count === 1) {
      lengths[0] = 0;
      return;
    }
    let lengthCounts: Float64Array = this.#lengthCounts;
    const longest = this.#countLengths(count);
    if (longest > maxBits) lengthCounts = limitedLengthCounts(this.#weights, count, maxBits);
    // The heaviest come last in the order and get the shortest words.
    let at = count;
    for (let length = 1; at > 0; length++) {
      for (let left = lengthCounts[length]; left > 0; left--) lengths[this.#order[--at]] = length;
    }
  }

  /**
   * Lightest first; among equals the higher index first, so that the lower one ends up nearer to
   * the root.
   */
  #sort(weights: Float64Array, count: number): void {
    if (count > this.#capacity) this.#grow(count);
    let total = 0;
    let heaviest = 0;
    for (let i = 0; i < count; i++) {
      const weight = weights[i];
      if (!(weight >= 1) || !Number.isSafeInteger(weight)) {
        throw new PromiseError('a weight of a prefix code is not a positive integer', {
          symbolIndex: i,
          got: String(weight),
        });
      }
      total += weight;
      if (weight > heaviest) heaviest = weight;
    }
    if (total > Number.MAX_SAFE_INTEGER) {
      throw new InputError('the weights of a prefix code sum to 2^53 or more', {
        got: String(total),
        advice:
          'Train on fewer symbols, or take an unseen=add:X whose X has a smaller denominator.',
      });
    }
    const step = 2 ** (32 - Math.clz32(count - 1));
    const order = this.#order;
    const sorted = this.#weights;
    if (heaviest < 2 ** 53 / step) {
      // Weight and index share one number, so that a sort of plain numbers does.
      const keys = this.#keys;
      for (let i = 0; i < count; i++) keys[i] = weights[i] * step + (count - 1 - i);
      if (count <= 24) insertionSort(keys, count);
      else keys.subarray(0, count).sort();
      for (let i = 0; i < count; i++) {
        const key = keys[i];
        const weight = Math.floor(key / step);
        sorted[i] = weight;
        order[i] = count - 1 - (key - weight * step);
      }
      return;
    }
    for (let i = 0; i < count; i++) order[i] = i;
    order.subarray(0, count).sort((a, b) => weights[a] - weights[b] || b - a);
    for (let i = 0; i < count; i++) sorted[i] = weights[order[i]];
  }

  /** How many words of each length the unlimited code has; returns the longest length. */
  #countLengths(count: number): number {
    const weights = this.#weights;
    const merged = this.#merged;
    const parents = this.#parents;
    let leaf = 0;
    let inner = 0;
    for (let made = 0; made < count - 1; made++) {
      let sum = 0;
      for (let pick = 0; pick < 2; pick++) {
        // On a tie the leaf goes first, which keeps the longest word short.
        if (leaf < count && (inner >= made || weights[leaf] <= merged[inner])) {
          sum += weights[leaf++];
        } else {
          sum += merged[inner];
          parents[inner++] = made;
        }
      }
      merged[made] = sum;
    }
    const depths = this.#depths;
    const lengthCounts = this.#lengthCounts;
    lengthCounts.fill(0);
    const root = count - 2;
    depths[root] = 0;
    let longest = 1;
    // A node at depth d has two children at depth d + 1; those that are nodes themselves are no
    // leaves.
    lengthCounts[1] = 2;
    for (let node = root - 1; node >= 0; node--) {
      const depth = depths[parents[node]] + 1;
      depths[node] = depth;
      lengthCounts[depth]--;
      lengthCounts[depth + 1] += 2;
      if (depth + 1 > longest) longest = depth + 1;
    }
    return longest;
  }

  #grow(count: number): void {
    const capacity = Math.max(count, 2 * this.#capacity, 32);
    this.#capacity = capacity;
    this.#keys = new Float64Array(capacity);
    this.#order = new Uint32Array(capacity);
    this.#weights = new Float64Array(capacity);
    this.#merged = new Float64Array(capacity);
    this.#parents = new Uint32Array(capacity);
    this.#depths = new Uint8Array(capacity);
  }
}

function insertionSort(keys: Float64Array, count: number): void {
  for (let i = 1; i < count; i++) {
    const key = keys[i];
    let at = i;
    while (at > 0 && keys[at - 1] > key) {
      keys[at] = keys[at - 1];
      at--;
    }
    keys[at] = key;
  }
}

/**
 * Code lengths of a minimum-redundancy prefix code, limited to `maxBits`: {@link CodeLengthFitter}
 * for one use.
 *
 * @param weights  shape [m], integers ≥ 0, their sum below 2^53
 * @param maxBits  1 … 32; 2^maxBits ≥ number of non-zero weights
 * @returns shape [m], in bits; {@link ABSENT} for a zero weight, 0 for the only non-zero one
 * @example codeLengths([5, 2, 1, 1], 15)  // [1, 2, 3, 3]
 */
export function codeLengths(weights: ArrayLike<number>, maxBits: number): Uint8Array {
  const present: number[] = [];
  for (let i = 0; i < weights.length; i++) if (weights[i] !== 0) present.push(i);
  const fitted = new Uint8Array(present.length);
  new CodeLengthFitter().fit(
    Float64Array.from(present, (i) => weights[i]),
    present.length,
    maxBits,
    fitted,
  );
  const lengths = new Uint8Array(weights.length).fill(ABSENT);
  for (const [at, i] of present.entries()) lengths[i] = fitted[at];
  return lengths;
}
