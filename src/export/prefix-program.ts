import { canonicalCodes, LengthTally } from '../stages/prefix-code.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import { elementBytesFor } from './exporter.ts';
import type { LanguageArray } from './language.ts';

/** `get_bits` and `put_bits` take so many bits at once. */
const MOST_BITS = 24;

function extentOf({ lengths, count }: PrefixTable): { shortest: number; longest: number } {
  const own = lengths.subarray(0, count);
  return {
    shortest: own.reduce((least, length) => Math.min(least, length), 255),
    longest: own.reduce((most, length) => Math.max(most, length), 0),
  };
}

/** Constants of the programs below. */
export function prefixConstants(table: PrefixTable): ReadonlyMap<string, number> {
  const { shortest, longest } = extentOf(table);
  return new Map([
    ['SHORTEST', shortest],
    ['LENGTHS', longest - shortest + 1],
  ]);
}

/** `put_word(i)`: the word of the table's i-th entry. */
export function prefixOut(table: PrefixTable): string {
  const { longest } = extentOf(table);
  if (longest === 0) {
    return `
// The only word is empty.
fn put_word(entry) {
}
`;
  }
  const write =
    longest <= MOST_BITS
      ? 'put_bits(word[entry], word_bits[entry]);'
      : `let bits = word_bits[entry];
  if (bits > 16) {
    put_bits(word[entry] >> 16, bits - 16);
    put_bits(word[entry] & 0xffff, 16);
  } else {
    put_bits(word[entry], bits);
  }`;
  return `
fn put_word(entry) {
  ${write}
}
`;
}

/** Tables of {@link prefixOut}. */
export function prefixOutTables(table: PrefixTable): LanguageArray[] {
  const lengths = table.lengths.slice(0, table.count);
  const { longest } = extentOf(table);
  if (longest === 0) return [];
  return [
    {
      name: 'word',
      elementBytes: elementBytesFor(2 ** longest - 1),
      values: canonicalCodes(lengths),
      comment: 'Code words, right-justified.',
    },
    { name: 'word_bits', elementBytes: 1, values: lengths, comment: 'Their lengths in bits.' },
  ];
}

/** `get_word()`: what stands in the table for the word that comes next. */
export function prefixIn(table: PrefixTable): string {
  const { longest } = extentOf(table);
  if (longest === 0) {
    return `
fn get_word() {
  return entry[0];
}
`;
  }
  return `
// Grows a word bit by bit from the shortest length until it is one of those of its length.
fn get_word() {
  let code = get_bits(SHORTEST);
  let i = 0;
  while (status == OK) {
    if (code >= first_word[i] && code - first_word[i] < words[i]) {
      return entry[first_entry[i] + (code - first_word[i])];
    }
    i = i + 1;
    if (i == LENGTHS) {
      status = CORRUPT;
      return 0;
    }
    code = (code << 1) | get_bits(1);
  }
}
`;
}

/** Tables of {@link prefixIn}: for each length from the shortest on, then the entries in canonical order. */
export function prefixInTables(table: PrefixTable): LanguageArray[] {
  const { symbols, lengths, count } = table;
  const { shortest, longest } = extentOf(table);
  const tally = new LengthTally();
  tally.take(lengths, count);
  const order = Array.from({ length: count }, (_, i) => i).sort(
    (a, b) => lengths[a] - lengths[b] || a - b,
  );
  const entries = order.map((i) => symbols[i]);
  const entry: LanguageArray = {
    name: 'entry',
    elementBytes: elementBytesFor(Math.max(...entries)),
    values: entries,
    comment: 'What the words stand for, in canonical order.',
  };
  if (longest === 0) return [entry];
  const firstWords: number[] = [];
  const words: number[] = [];
  const places: number[] = [];
  let place = 0;
  for (let length = shortest; length <= longest; length++) {
    firstWords.push(tally.first[length]);
    words.push(tally.counts[length]);
    places.push(place);
    place += tally.counts[length];
  }
  return [
    {
      name: 'first_word',
      elementBytes: elementBytesFor(Math.max(...firstWords)),
      values: firstWords,
      comment: 'For each length from the shortest on: its first word,',
    },
    {
      name: 'words',
      elementBytes: elementBytesFor(Math.max(...words)),
      values: words,
      comment: 'how many words it has,',
    },
    {
      name: 'first_entry',
      elementBytes: elementBytesFor(count),
      values: places,
      comment: 'and the place of the first of them.',
    },
    entry,
  ];
}
