import { OperationTally } from '../models/counting-tally.ts';
import { ABSENT } from '../stages/code-lengths.ts';
import { CountingPrefix } from '../stages/counting-prefix.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Lengths } from './contract.ts';
import {
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  type EndOperations,
  integerBytes,
} from './cost.ts';
import { MEASURED, measuredCosts } from './cost-measured.ts';

/** Look up, shift in, flush whole bytes; look, walk lengths, shift out, refill. */
export const PREFIX_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 12, nestedCalls: 1 },
  decoder: { statements: 16, nestedCalls: 1 },
};

/** A 32-bit accumulator or window, its bit count and a position of 4 bytes. */
export const PREFIX_STATE_BYTES = 9;

/** Bytes of the coded text that a decoder looks at to find a word. */
export const PREFIX_WINDOW_BYTES = 4;

/** Shortest and longest word of a table in bits; 0, 0 for a lone symbol. */
function extentOf({ lengths, count }: CountedWords): { shortest: number; longest: number } {
  let shortest = ABSENT;
  let longest = 0;
  for (let i = 0; i < count; i++) {
    shortest = Math.min(shortest, lengths[i]);
    longest = Math.max(longest, lengths[i]);
  }
  return { shortest: count === 0 ? 0 : shortest, longest };
}

/**
 * Bytes of a canonical code's tables at either end.
 *
 * Encoder, for each word: its length (1 byte) and the word. Decoder, for each length from the shortest to the longest:
 * first word, number of words, place of the first in the list; then the list, in canonical order, of what the words stand for.
 * @param greatestEntry  largest value in that list
 */
export function prefixTableBytes(table: PrefixTable, greatestEntry: number): BothEnds<number> {
  const { count } = table;
  const { shortest, longest } = extentOf(table);
  if (longest === 0) return { encoder: count, decoder: count * integerBytes(greatestEntry) };
  const wordBytes = integerBytes(2 ** longest - 1);
  const slotBytes = wordBytes + integerBytes(count) + integerBytes(count - 1);
  return {
    encoder: count * (1 + wordBytes),
    decoder: (longest - shortest + 1) * slotBytes + count * integerBytes(greatestEntry),
  };
}

/** Costs of a coder that has one word for each of `alphabetSize` symbols, both ends with shipped tables. */
export function prefixCosts(
  table: PrefixTable,
  alphabetSize: number,
  lengths: Lengths,
): BothEnds<EndCost> {
  return measuredCosts(MEASURED.huffman, lengths, prefixTableBytes(table, alphabetSize - 1));
}

/** What is counted of a table: words and what they stand for. */
export type CountedWords = Pick<PrefixTable, 'symbols' | 'lengths' | 'count'>;

/** Counts words of a table; see CountingPrefix. */
export function countingPrefix(
  table: CountedWords,
  alphabetSize: number,
  encoder: OperationTally,
  decoder: OperationTally,
): CountingPrefix {
  const lengths = new Uint8Array(alphabetSize).fill(ABSENT);
  for (let i = 0; i < table.count; i++) lengths[table.symbols[i]] = table.lengths[i];
  return new CountingPrefix(lengths, extentOf(table).shortest, encoder, decoder);
}

/** Counts the words of a sequence. */
export function prefixOperations(table: PrefixTable, sequence: SymbolSequence): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const counting = countingPrefix(table, sequence.alphabetSize, encoder, decoder);
  counting.code(sequence.symbols, 0, sequence.symbols.length);
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
