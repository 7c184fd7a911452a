import type { StaticTable } from '../models/static-table.ts';
import { elementBytesFor } from './exporter.ts';
import type { LanguageArray } from './language.ts';

/**
 * A static order-k model, decision for decision that of `src/models/static-model.ts`. The state is one context number. A frequency is the
 * distance to the next lower end, so it is not stored, and all totals are one.
 */
const FIND = `
// The context's entry of a symbol, or NONE.
fn find(place, symbol) {
  let from = entry_start[place];
  let end = entry_start[place + 1];
  let to = end;
  while (from < to) {
    let middle = (from + to) >> 1;
    if (entry_symbol[middle] < symbol) {
      from = middle + 1;
    } else {
      to = middle;
    }
  }
  if (from < end && entry_symbol[from] == symbol) {
    return from;
  }
  return NONE;
}
`;

const SHARED = `
state context;

// Where the interval of an entry ends.
fn entry_end(place, entry) {
  if (entry + 1 == entry_start[place + 1]) {
    return unseen_from[place];
  }
  return entry_low[entry + 1];
}

// The empty context of the next position.
fn next_empty(place) {
  if (place + 1 == POSITIONS) {
    return 0;
  }
  return place + 1;
}
`;

const HOLDING = `
// The entry whose interval holds a target.
fn entry_holding(place, target) {
  let from = entry_start[place];
  let to = entry_start[place + 1];
  while (to - from > 1) {
    let middle = (from + to) >> 1;
    if (entry_low[middle] <= target) {
      from = middle;
    } else {
      to = middle;
    }
  }
  return from;
}
`;

const ESCAPE_OUT = `
fn put_symbol(symbol) {
  let place = context;
  let searching = 1;
  while (searching == 1) {
    if (unseen_from[place] != 0) {
      let entry = find(place, symbol);
      if (entry != NONE) {
        let start = entry_low[entry];
        let frequency = entry_end(place, entry) - start;
        if (frequency < TOTAL) {
          put_interval(start, frequency, TOTAL);
        }
        context = entry_next[entry];
        return 0;
      }
      put_interval(unseen_from[place], TOTAL - unseen_from[place], TOTAL);
    }
    if (place < POSITIONS) {
      searching = 0;
    } else {
      place = suffix[place];
    }
  }
  if (ALPHABET > 1) {
    put_interval(symbol, 1, ALPHABET);
  }
  context = next_empty(place);
}
`;

const ESCAPE_IN = `
fn get_symbol() {
  let place = context;
  let searching = 1;
  while (searching == 1) {
    if (unseen_from[place] != 0) {
      let first = entry_start[place];
      let certain = 0;
      let target = 0;
      if (entry_end(place, first) - entry_low[first] == TOTAL) {
        certain = 1;
      } else {
        target = get_target(TOTAL);
      }
      if (status != OK) {
        return 0;
      }
      if (target < unseen_from[place]) {
        let entry = entry_holding(place, target);
        if (certain == 0) {
          take_interval(entry_low[entry], entry_end(place, entry) - entry_low[entry]);
        }
        context = entry_next[entry];
        return entry_symbol[entry];
      }
      take_interval(unseen_from[place], TOTAL - unseen_from[place]);
    }
    if (place < POSITIONS) {
      searching = 0;
    } else {
      place = suffix[place];
    }
  }
  context = next_empty(place);
  let symbol = 0;
  if (ALPHABET > 1) {
    symbol = get_target(ALPHABET);
    if (status == OK) {
      take_interval(symbol, 1);
    }
  }
  return symbol;
}
`;

/** The longest known context after a symbol that a context has not seen. */
const AFTER = `
fn context_after(place, symbol) {
  let shorter = place;
  let entry = find(shorter, symbol);
  while (entry == NONE) {
    if (shorter < POSITIONS) {
      return next_empty(shorter);
    }
    shorter = suffix[shorter];
    entry = find(shorter, symbol);
  }
  return entry_next[entry];
}
`;

const ADDED_OUT = `
// How many symbols with entries in the context lie below this one, which has none.
fn entries_below(place, symbol) {
  let from = entry_start[place];
  let to = entry_start[place + 1];
  while (from < to) {
    let middle = (from + to) >> 1;
    if (entry_symbol[middle] < symbol) {
      from = middle + 1;
    } else {
      to = middle;
    }
  }
  return from - entry_start[place];
}

fn put_symbol(symbol) {
  let place = context;
  if (unseen_from[place] != 0) {
    let entry = find(place, symbol);
    if (entry != NONE) {
      let start = entry_low[entry];
      let frequency = entry_end(place, entry) - start;
      if (frequency < TOTAL) {
        put_interval(start, frequency, TOTAL);
      }
      context = entry_next[entry];
      return 0;
    }
    let rank = symbol - entries_below(place, symbol);
    put_interval(unseen_from[place] + rank * unseen_each[place], unseen_each[place], TOTAL);
  } else if (ALPHABET > 1) {
    put_interval(symbol, 1, ALPHABET);
  }
  context = context_after(place, symbol);
}
`;

const ADDED_IN = `
// The symbol without an entry that has so many of its kind below it.
fn unseen_symbol(place, rank) {
  let first = entry_start[place];
  let from = first;
  let to = entry_start[place + 1];
  while (from < to) {
    let middle = (from + to) >> 1;
    if (entry_symbol[middle] - (middle - first) <= rank) {
      from = middle + 1;
    } else {
      to = middle;
    }
  }
  return rank + (from - first);
}

fn get_symbol() {
  let place = context;
  let symbol = 0;
  if (unseen_from[place] != 0) {
    let first = entry_start[place];
    let certain = 0;
    let target = 0;
    if (entry_end(place, first) - entry_low[first] == TOTAL) {
      certain = 1;
    } else {
      target = get_target(TOTAL);
    }
    if (status != OK) {
      return 0;
    }
    if (target < unseen_from[place]) {
      let entry = entry_holding(place, target);
      if (certain == 0) {
        take_interval(entry_low[entry], entry_end(place, entry) - entry_low[entry]);
      }
      context = entry_next[entry];
      return entry_symbol[entry];
    }
    let each = unseen_each[place];
    let rank = (target - unseen_from[place]) / each;
    take_interval(unseen_from[place] + rank * each, each);
    symbol = unseen_symbol(place, rank);
  } else if (ALPHABET > 1) {
    symbol = get_target(ALPHABET);
    if (status == OK) {
      take_interval(symbol, 1);
    }
  }
  context = context_after(place, symbol);
  return symbol;
}
`;

/** `put_symbol(symbol)`, over `put_interval`. */
export function staticOut(table: StaticTable): string {
  return FIND + SHARED + (table.unseen === 'escape' ? ESCAPE_OUT : AFTER + ADDED_OUT);
}

/** `get_symbol()`, over `get_target` and `take_interval`. */
export function staticIn(table: StaticTable): string {
  return SHARED + HOLDING + (table.unseen === 'escape' ? ESCAPE_IN : FIND + AFTER + ADDED_IN);
}

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
