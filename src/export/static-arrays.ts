import type { StaticTable } from '../models/static-table.ts';
import { elementBytesFor } from './exporter.ts';
import type { LanguageArray } from './language.ts';

/** A table without the nodes that are no context of any symbol. */
interface Contexts {
  readonly tables: readonly LanguageArray[];
  readonly start: number;
}

/** The tables of a static model as arrays, and the number of the context that a message starts in. */
export function staticTables(table: StaticTable, total: number): Contexts {
  const { order, length, entryStart, suffix, unseenFrom, unseenFrequency, next } = table;
  const numbers = new Uint32Array(length.length);
  const contexts: number[] = [];
  for (let node = 0; node < length.length; node++) {
    if (length[node] > order) continue;
    numbers[node] = contexts.length;
    contexts.push(node);
  }
  const entries = table.symbols.length;
  const contextBytes = elementBytesFor(contexts.length - 1);
  const tables: LanguageArray[] = [
    {
      name: 'entry_start',
      elementBytes: elementBytesFor(entries),
      values: [...contexts.map((node) => entryStart[node]), entries],
      comment: 'For each context: its first entry,',
    },
    {
      name: 'suffix',
      elementBytes: contextBytes,
      values: contexts.map((node) => numbers[suffix[node]]),
      comment: 'the context without its oldest symbol,',
    },
    {
      name: 'unseen_from',
      elementBytes: elementBytesFor(total),
      values: contexts.map((node) => unseenFrom[node]),
      comment: 'where the interval of what it has not seen begins; 0 where nothing is coded in it.',
    },
    {
      name: 'entry_symbol',
      elementBytes: elementBytesFor(table.alphabetSize - 1),
      values: table.symbols,
      comment: 'For each entry: its symbol,',
    },
    {
      name: 'entry_low',
      elementBytes: elementBytesFor(total),
      values: Array.from(table.lows),
      comment: 'where its interval begins,',
    },
    {
      name: 'entry_next',
      elementBytes: contextBytes,
      values: Array.from(next, (node) => numbers[node]),
      comment: 'and the context after it.',
    },
  ];
  if (table.unseen !== 'escape') {
    tables.push({
      name: 'unseen_each',
      elementBytes: elementBytesFor(total),
      values: contexts.map((node) => unseenFrequency[node]),
      comment: 'For each context: the frequency of one symbol that it has not seen.',
    });
  }
  return { tables, start: numbers[table.startContext] };
}
