/** The longest known context after a symbol that a context has not seen. */
export const AFTER = `
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

/** `put_symbol` where each unseen symbol has a share of its own. */
export const ADDED_OUT = `
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

/** `get_symbol` to it. */
export const ADDED_IN = `
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
