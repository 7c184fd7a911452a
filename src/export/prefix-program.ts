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

/** Names of a prefix code's functions, tables and constants, so that a program can hold several codes. */
const OWN_NAMES =
  /\b(put_word|get_word|word|word_bits|first_word|words|first_entry|entry|SHORTEST|LENGTHS)\b/g;

function named(text: string, prefix: string): string {
  return text.replace(OWN_NAMES, (name) =>
    name === name.toUpperCase() ? `${prefix.toUpperCase()}${name}` : `${prefix}${name}`,
  );
}

const renamed = (tables: LanguageArray[], prefix: string): LanguageArray[] =>
  tables.map((table) => ({ ...table, name: `${prefix}${table.name}` }));

/** Constants of the programs below. */
export function prefixConstants(table: PrefixTable, prefix = ''): ReadonlyMap<string, number> {
  const { shortest, longest } = extentOf(table);
  const upper = prefix.toUpperCase();
  return new Map([
    [`${upper}SHORTEST`, shortest],
    [`${upper}LENGTHS`, longest - shortest + 1],
  ]);
}

/** Longest word in bits. */
export function longestWordBits(table: PrefixTable): number {
  return extentOf(table).longest;
}

/** `put_word(i)`: the word of the table's i-th entry. @param prefix  stands before every name */
export function prefixOut(table: PrefixTable, prefix = ''): string {
  return named(wordOut(table), prefix);
}

function wordOut(table: PrefixTable): string {
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
export function prefixOutTables(table: PrefixTable, prefix = ''): LanguageArray[] {
  return renamed(wordTables(table), prefix);
}

function wordTables(table: PrefixTable): LanguageArray[] {
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
export function prefixIn(table: PrefixTable, prefix = ''): string {
  return named(wordIn(table, 'entry[PLACE]'), prefix);
}

/** `get_word()` gives the word's place in canonical order instead: {@link canonicalOrder}. */
export function prefixPlaceIn(table: PrefixTable, prefix = ''): string {
  return named(wordIn(table, 'PLACE'), prefix);
}

function wordIn(table: PrefixTable, result: string): string {
  const { longest } = extentOf(table);
  if (longest === 0) {
    return `
fn get_word() {
  return ${result.replace('PLACE', '0')};
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
      return ${result.replace('PLACE', 'first_entry[i] + (code - first_word[i])')};
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

/** Indices of a table's entries in canonical order: by length, then as listed. */
export function canonicalOrder({ lengths, count }: PrefixTable): number[] {
  return Array.from({ length: count }, (_, i) => i).sort(
    (a, b) => lengths[a] - lengths[b] || a - b,
  );
}

/** Tables of {@link prefixIn}: for each length from the shortest on, then the entries in canonical order. */
export function prefixInTables(table: PrefixTable, prefix = ''): LanguageArray[] {
  const entries = canonicalOrder(table).map((i) => table.symbols[i]);
  const entry: LanguageArray = {
    name: 'entry',
    elementBytes: elementBytesFor(entries.reduce((most, value) => Math.max(most, value), 0)),
    values: entries,
    comment: 'What the words stand for, in canonical order.',
  };
  return [...prefixPlaceTables(table, prefix), ...renamed([entry], prefix)];
}

/** Tables of {@link prefixPlaceIn}. */
export function prefixPlaceTables(table: PrefixTable, prefix = ''): LanguageArray[] {
  const { lengths, count } = table;
  const { shortest, longest } = extentOf(table);
  if (longest === 0) return [];
  const tally = new LengthTally();
  tally.take(lengths, count);
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
  return renamed(
    [
      {
        name: 'first_word',
        elementBytes: elementBytesFor(2 ** longest - 1),
        values: firstWords,
        comment: 'For each length from the shortest on: its first word,',
      },
      {
        name: 'words',
        elementBytes: elementBytesFor(count),
        values: words,
        comment: 'how many words it has,',
      },
      {
        name: 'first_entry',
        elementBytes: elementBytesFor(count - 1),
        values: places,
        comment: 'and the place of the first of them.',
      },
    ],
    prefix,
  );
}
