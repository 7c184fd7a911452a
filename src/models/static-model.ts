import { CorruptStreamError, PromiseError } from '../errors/errors.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';
import type { StaticTable } from './static-table.ts';
import type { SymbolModel } from './symbol-model.ts';

const NONE = -1;

/**
 * Codes with a {@link StaticTable}. The whole state is one context number; a symbol is found by halving the entries.
 *
 * With a table of exact weights it drives a meter only: its totals may pass what a stage can code.
 */
export class StaticModel implements SymbolModel {
  readonly #table: StaticTable;
  #context: number;

  constructor(table: StaticTable) {
    this.#table = table;
    this.#context = table.startContext;
  }

  reset(): void {
    this.#context = this.#table.startContext;
  }

  encode(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    const escapes = this.#table.unseen === 'escape';
    for (let i = from; i < to; i++) {
      if (escapes) this.#encodeEscaping(symbols[i], sink);
      else this.#encodeAtOrder(symbols[i], sink);
    }
  }

  decode(source: IntervalSource, symbols: SymbolArray, from: number, to: number): void {
    const escapes = this.#table.unseen === 'escape';
    for (let i = from; i < to; i++) {
      symbols[i] = escapes ? this.#decodeEscaping(source) : this.#decodeAtOrder(source);
    }
  }

  #encodeEscaping(symbol: number, sink: IntervalSink): void {
    const { totals, unseenFrom, suffix, lows, frequencies, next, positions } = this.#table;
    let context = this.#context;
    for (;;) {
      const total = totals[context];
      if (total > 0) {
        const entry = this.#find(context, symbol);
        if (entry !== NONE) {
          if (frequencies[entry] < total) sink.put(lows[entry], frequencies[entry], total);
          this.#context = next[entry];
          return;
        }
        sink.put(unseenFrom[context], total - unseenFrom[context], total);
      }
      if (context < positions) break;
      context = suffix[context];
    }
    const size = this.#table.alphabetSize;
    if (size > 1) sink.put(symbol, 1, size);
    this.#context = this.#nextEmpty(context);
  }

  #decodeEscaping(source: IntervalSource): number {
    const { totals, unseenFrom, suffix, lows, frequencies, next, symbols, positions } = this.#table;
    let context = this.#context;
    for (;;) {
      const total = totals[context];
      if (total > 0) {
        const from = unseenFrom[context];
        const first = this.#table.entryStart[context];
        const certain = frequencies[first] === total;
        const target = certain ? 0 : source.target(total);
        if (target < from) {
          const entry = this.#holding(context, target);
          if (!certain) source.take(lows[entry], frequencies[entry]);
          this.#context = next[entry];
          return symbols[entry];
        }
        source.take(from, total - from);
      }
      if (context < positions) break;
      context = suffix[context];
    }
    const size = this.#table.alphabetSize;
    this.#context = this.#nextEmpty(context);
    if (size === 1) return 0;
    const symbol = source.target(size);
    source.take(symbol, 1);
    return symbol;
  }

  #encodeAtOrder(symbol: number, sink: IntervalSink): void {
    const { totals, unseenFrom, unseenFrequency, lows, frequencies, next, entryStart } =
      this.#table;
    const context = this.#context;
    const total = totals[context];
    const entry = this.#find(context, symbol);
    if (entry !== NONE && total > 0) {
      if (frequencies[entry] < total) sink.put(lows[entry], frequencies[entry], total);
      this.#context = next[entry];
      return;
    }
    if (this.#table.unseen === 'none') {
      throw new PromiseError('a table fitted to other symbols was used', {
        got: `symbol ${symbol}, which its context does not have`,
      });
    }
    const size = this.#table.alphabetSize;
    if (total === 0) {
      if (size > 1) sink.put(symbol, 1, size);
    } else {
      const rank = symbol - (this.#firstFrom(context, symbol) - entryStart[context]);
      const frequency = unseenFrequency[context];
      sink.put(unseenFrom[context] + rank * frequency, frequency, total);
    }
    this.#context = this.#after(context, symbol);
  }

  #decodeAtOrder(source: IntervalSource): number {
    const { totals, unseenFrom, unseenFrequency, lows, frequencies, next, symbols, entryStart } =
      this.#table;
    const context = this.#context;
    const total = totals[context];
    let symbol = 0;
    if (total > 0) {
      const certain = frequencies[entryStart[context]] === total;
      const target = certain ? 0 : source.target(total);
      if (target < unseenFrom[context]) {
        const entry = this.#holding(context, target);
        if (!certain) source.take(lows[entry], frequencies[entry]);
        this.#context = next[entry];
        return symbols[entry];
      }
      const frequency = unseenFrequency[context];
      const rank = Math.floor((target - unseenFrom[context]) / frequency);
      source.take(unseenFrom[context] + rank * frequency, frequency);
      symbol = this.#unseenAt(context, rank);
    } else if (this.#table.unseen === 'none') {
      throw new CorruptStreamError(
        'a symbol is coded in a context that the sent table does not have',
      );
    } else if (this.#table.alphabetSize > 1) {
      symbol = source.target(this.#table.alphabetSize);
      source.take(symbol, 1);
    }
    this.#context = this.#after(context, symbol);
    return symbol;
  }

  /** The longest known context after a symbol that `context` itself has not seen. */
  #after(context: number, symbol: number): number {
    const { suffix, next, positions } = this.#table;
    for (let shorter = context; ; shorter = suffix[shorter]) {
      const entry = this.#find(shorter, symbol);
      if (entry !== NONE) return next[entry];
      if (shorter < positions) return this.#nextEmpty(shorter);
    }
  }

  /** The empty context of the position after that of `context`, an empty one too. */
  #nextEmpty(context: number): number {
    return context + 1 === this.#table.positions ? 0 : context + 1;
  }

  /** First entry of the context whose symbol is `symbol` or larger. */
  #firstFrom(context: number, symbol: number): number {
    const { entryStart, symbols } = this.#table;
    let from = entryStart[context];
    let to = entryStart[context + 1];
    while (from < to) {
      const middle = (from + to) >>> 1;
      if (symbols[middle] < symbol) from = middle + 1;
      else to = middle;
    }
    return from;
  }

  #find(context: number, symbol: number): number {
    const entry = this.#firstFrom(context, symbol);
    const { entryStart, symbols } = this.#table;
    return entry < entryStart[context + 1] && symbols[entry] === symbol ? entry : NONE;
  }

  /** The entry whose interval holds the target. */
  #holding(context: number, target: number): number {
    const { entryStart, lows } = this.#table;
    let from = entryStart[context];
    let to = entryStart[context + 1];
    while (to - from > 1) {
      const middle = (from + to) >>> 1;
      if (lows[middle] <= target) from = middle;
      else to = middle;
    }
    return from;
  }

  /** The symbol without an entry that has `rank` such symbols below it. */
  #unseenAt(context: number, rank: number): number {
    const { entryStart, symbols } = this.#table;
    const first = entryStart[context];
    let from = first;
    let to = entryStart[context + 1];
    while (from < to) {
      const middle = (from + to) >>> 1;
      if (symbols[middle] - (middle - first) <= rank) from = middle + 1;
      else to = middle;
    }
    return rank + (from - first);
  }
}
