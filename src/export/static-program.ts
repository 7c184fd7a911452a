import type { StaticTable } from '../models/static-table.ts';
import { ADDED_IN, ADDED_OUT, AFTER } from './static-added-program.ts';

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

const TO_SHORTER = `
    if (place < POSITIONS) {
      searching = 0;
    } else {
      place = suffix[place];
    }
`;

const AFTER_SHORTER = `
    shorter = suffix[shorter];
    entry = find(shorter, symbol);
`;

/** Without the tables that order 0 does not need: there is no shorter context, and with one position only one context. */
function fitted(text: string, { order, positions }: StaticTable): string {
  if (order > 0) return text;
  const flat = text
    .replace(TO_SHORTER, '\n    searching = 0;\n')
    .replace(AFTER_SHORTER, '\n')
    .replace(
      'while (entry == NONE) {\n    if (shorter < POSITIONS) {\n      return next_empty(shorter);\n    }\n',
      'if (entry == NONE) {\n    return next_empty(shorter);',
    );
  return positions > 1 ? flat : flat.replaceAll('entry_next[entry]', '0');
}

/** `put_symbol(symbol)`, over `put_interval`. */
export function staticOut(table: StaticTable): string {
  return fitted(
    FIND + SHARED + (table.unseen === 'escape' ? ESCAPE_OUT : AFTER + ADDED_OUT),
    table,
  );
}

/** `get_symbol()`, over `get_target` and `take_interval`. */
export function staticIn(table: StaticTable): string {
  return fitted(
    SHARED + HOLDING + (table.unseen === 'escape' ? ESCAPE_IN : FIND + AFTER + ADDED_IN),
    table,
  );
}
