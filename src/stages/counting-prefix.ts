import type { OperationTally } from '../models/counting-tally.ts';
import type { SymbolArray } from '../symbols/sequence.ts';

/** Longer words go out in two parts: see PrefixEncoder. */
const WORD_BITS_AT_ONCE = 24;

/**
 * Counts what the words of a canonical code take, by the paths of PrefixEncoder and PrefixDecoder that need no expanded table:
 * one word at a time, and the walk over lengths.
 *
 * Encoder, a word: 2 table reads (length, word), 1 branch (whether it goes at once); in two parts 1 more of each. Decoder, for
 * each length from the shortest to the word's own: 2 table reads (first word, count) and 2 branches (whether lengths are
 * left, whether the word is found); then 2 reads (offset, symbol). An empty word: the encoder's length and its test only.
 */
export class CountingPrefix {
  readonly #lengths: Uint8Array;
  readonly #shortest: number;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;

  /**
   * @param lengths   by symbol, in bits
   * @param shortest  least length of the code, 0 where its only word is empty
   */
  constructor(
    lengths: Uint8Array,
    shortest: number,
    encoder: OperationTally,
    decoder: OperationTally,
  ) {
    this.#lengths = lengths;
    this.#shortest = shortest;
    this.#encoder = encoder;
    this.#decoder = decoder;
  }

  /** Adds one word at both ends; closes nothing. */
  count(symbol: number): void {
    const length = this.#lengths[symbol];
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    if (length === 0) {
      encoder.tableReads += 1;
      encoder.branches += 1;
      return;
    }
    const parts = length > WORD_BITS_AT_ONCE ? 2 : 1;
    encoder.tableReads += 1 + parts;
    encoder.branches += parts;
    const steps = length - this.#shortest + 1;
    decoder.tableReads += 2 * steps + 2;
    decoder.branches += 2 * steps;
  }

  /** Adds the words of `symbols[from … to − 1]` and closes each. */
  code(symbols: SymbolArray, from: number, to: number): void {
    for (let i = from; i < to; i++) {
      this.count(symbols[i]);
      this.#encoder.close();
      this.#decoder.close();
    }
  }
}
