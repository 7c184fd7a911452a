import { PromiseError } from '../errors/errors.ts';
import { ABSENT, LONGEST_WORD_BITS } from './code-lengths.ts';

/** Entries of an array that is indexed by word length. */
export const LENGTH_SLOTS = LONGEST_WORD_BITS + 1;

/**
 * Code words by length alone, in canonical order: shortest first, among equal lengths in the order
 * listed; each word is the one before plus 1, shifted to its own length. So the lengths say every
 * word.
 *
 * Sources: E. S. Schwartz, B. Kallick, Comm. ACM 7(3), 1964; as in RFC 1951, section 3.2.2 (P.
 * Deutsch, 1996).
 * Examples of lengths: 1 2 2 is complete; 1 2 is under-full (the word 11 is nobody's); 1 1 2 is
 * over-full and refused.
 */
export class LengthTally {
  /** Words of each length; index 0 counts empty words. */
  readonly counts = new Float64Array(LENGTH_SLOTS);
  /** The first word of each length, right-justified. */
  readonly first = new Float64Array(LENGTH_SLOTS);
  /** Σ 2^−length is 1: every long enough string of bits begins with a word. */
  complete = false;

  /**
   * Takes the first `count` lengths; {@link ABSENT} ones have no word.
   * @throws PromiseError when a length is above 32 or the words do not fit (Kraft sum above 1)
   */
  take(lengths: Uint8Array, count: number): void {
    const { counts, first } = this;
    counts.fill(0);
    for (let i = 0; i < count; i++) {
      const length = lengths[i];
      if (length === ABSENT) continue;
      if (length > LONGEST_WORD_BITS) {
        throw new PromiseError('a code word is longer than any that is used', {
          symbolIndex: i,
          expected: `at most ${LONGEST_WORD_BITS} bits`,
          got: `${length} bits`,
        });
      }
      counts[length]++;
    }
    let used = 0;
    for (let length = 1; length <= LONGEST_WORD_BITS; length++) {
      used *= 2;
      first[length] = used;
      used += counts[length];
      if (used > 2 ** length || (counts[0] > 0 && counts[length] > 0)) {
        throw new PromiseError('code words do not fit: the Kraft sum is above 1', {
          got: `${used} words and inner nodes at ${length} bits, where ${2 ** length} fit`,
        });
      }
    }
    this.complete = counts[0] === 1 || used === 2 ** LONGEST_WORD_BITS;
  }
}

/**
 * The canonical code words of `lengths`, right-justified; see {@link LengthTally}.
 * @returns shape [m]; 0 where the symbol is {@link ABSENT}
 * @example canonicalCodes(Uint8Array.of(1, 2, 3, 3))  // [0b0, 0b10, 0b110, 0b111]
 */
export function canonicalCodes(lengths: Uint8Array): Uint32Array {
  const tally = new LengthTally();
  tally.take(lengths, lengths.length);
  const codes = new Uint32Array(lengths.length);
  for (let i = 0; i < lengths.length; i++)
    if (lengths[i] !== ABSENT) codes[i] = tally.first[lengths[i]]++;
  return codes;
}
