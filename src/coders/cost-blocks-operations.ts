import { OperationTally } from '../models/counting-tally.ts';
import type { CountingPrefix } from '../stages/counting-prefix.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';
import { expandKeys } from './block-huffman-ngrams.ts';
import type { BlockFit } from './block-huffman-tables.ts';
import type { EndOperations } from './cost.ts';
import { type CountedWords, countingPrefix } from './cost-prefix.ts';

/**
 * Takes the steps of blocks over the lists that blockCosts lays out, and counts them; how words are written and found, see
 * CountingPrefix. A block's steps are booked on its last symbol at the encoder, on its first at the decoder.
 *
 * Encoder, a block: halving in the list, each step 1 branch for the loop; its block is compared symbol by symbol, each 1 read and
 * 1 branch (whether they differ), where they do 1 branch more (which is less); 1 branch for the loop's end, 1 whether the list
 * ended there, then the block found is compared. Decoder: 1 branch whether the word is the escape, where the code has one,
 * then n reads of symbols. Symbols after an escape: 1 branch each at the decoder, whether they lie in the alphabet.
 */
export class CountingBlocks {
  readonly #n: number;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  readonly #ngrams: number;
  readonly #escape: number;
  /** n symbols a block, rising. */
  readonly #listed: Uint32Array;
  readonly #blocks: CountingPrefix;
  readonly #tail: CountingPrefix;

  constructor(
    fit: BlockFit,
    n: number,
    alphabetSize: number,
    encoder: OperationTally,
    decoder: OperationTally,
  ) {
    const { blocks, tail } = fit;
    this.#n = n;
    this.#encoder = encoder;
    this.#decoder = decoder;
    this.#escape = fit.escape;
    this.#ngrams = fit.escape < 0 ? blocks.count : fit.escape;
    this.#listed = new Uint32Array(n * this.#ngrams);
    expandKeys(blocks.symbols, this.#ngrams, n, alphabetSize, this.#listed);
    this.#blocks = countingPrefix(numbered(blocks), blocks.count, encoder, decoder);
    this.#tail = countingPrefix(tail.table, alphabetSize, encoder, decoder);
  }

  /** Counts the message `symbols[from … to − 1]` and closes each symbol. */
  code(symbols: SymbolArray, from: number, to: number): void {
    const n = this.#n;
    let at = from;
    for (; to - at >= n; at += n) this.#codeBlock(symbols, at);
    for (; at < to; at++) {
      this.#tail.count(symbols[at]);
      this.#encoder.close();
      this.#decoder.close();
    }
  }

  #codeBlock(symbols: SymbolArray, at: number): void {
    const n = this.#n;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    for (let i = 1; i < n; i++) encoder.close();
    const entry = this.#find(symbols, at);
    this.#blocks.count(entry < 0 ? this.#escape : entry);
    encoder.close();
    if (this.#escape >= 0) decoder.branches += 1;
    if (entry >= 0) decoder.tableReads += n;
    for (let i = 0; i < n; i++) {
      if (entry < 0) decoder.branches += 1;
      decoder.close();
    }
  }

  /** Place of the block in the list; −1 where it is not there. */
  #find(symbols: SymbolArray, at: number): number {
    const encoder = this.#encoder;
    let from = 0;
    let to = this.#ngrams;
    while (from < to) {
      const middle = (from + to) >>> 1;
      encoder.branches += 1;
      if (this.#compare(middle, symbols, at) < 0) from = middle + 1;
      else to = middle;
    }
    encoder.branches += 2;
    return from < this.#ngrams && this.#compare(from, symbols, at) === 0 ? from : -1;
  }

  /** Below 0 where the listed block comes before the one at `at`, 0 where they are the same. */
  #compare(entry: number, symbols: SymbolArray, at: number): number {
    const encoder = this.#encoder;
    const n = this.#n;
    for (let i = 0; i < n; i++) {
      const difference = this.#listed[n * entry + i] - symbols[at + i];
      encoder.tableReads += 1;
      encoder.branches += 1;
      if (difference !== 0) {
        encoder.branches += 1;
        return difference;
      }
    }
    return 0;
  }
}

/** The table of the blocks' numbers. */
function numbered({ lengths, count }: PrefixTable): CountedWords {
  return { symbols: Float64Array.from({ length: count }, (_, i) => i), lengths, count };
}

/** Counts all messages with one pair of tables. */
export function blockOperations(
  fit: BlockFit,
  n: number,
  { alphabetSize, symbols, messageEnds }: SymbolSequence,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const counting = new CountingBlocks(fit, n, alphabetSize, encoder, decoder);
  let from = 0;
  for (const to of messageEnds) {
    counting.code(symbols, from, to);
    from = to;
  }
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
