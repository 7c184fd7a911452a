import type { SymbolArray } from '../symbols/sequence.ts';
import type { OperationTally } from './counting-tally.ts';
import type { IntervalSink } from './interval.ts';
import type { StaticTable } from './static-table.ts';

const NONE = -1;

/**
 * Takes the steps of a {@link StaticModel}'s encoder and decoder together and counts what each reads and decides. It is a
 * class of its own, so that the model itself pays nothing. The same intervals come out; the decoder's search is followed
 * without a stream, since it ends at the entry of the symbol that was coded.
 *
 * Table reads: every element of a {@link StaticTable} that the model's code reads, twice where it reads twice. Branches: see
 * OperationTally; what depends on the candidate alone (such as `unseen`) is none. What the stage does is counted by the sink.
 */
export class CountingStatic {
  readonly #table: StaticTable;
  readonly #encoder: OperationTally;
  readonly #decoder: OperationTally;
  /** Empty contexts: they are numbered first. */
  readonly #empty: number;
  #context: number;

  constructor(table: StaticTable, encoder: OperationTally, decoder: OperationTally) {
    this.#table = table;
    let empty = 0;
    while (empty < table.length.length && table.length[empty] === 0) empty++;
    this.#empty = empty;
    this.#encoder = encoder;
    this.#decoder = decoder;
    this.#context = table.startContext;
  }

  reset(): void {
    this.#context = this.#table.startContext;
  }

  /** Codes `symbols[from … to − 1]` and closes each at both ends. */
  code(symbols: SymbolArray, from: number, to: number, sink: IntervalSink): void {
    const escapes = this.#table.unseen === 'escape';
    for (let i = from; i < to; i++) {
      if (escapes) this.#codeEscaping(symbols[i], sink);
      else this.#codeAtOrder(symbols[i], sink);
      this.#encoder.close();
      this.#decoder.close();
    }
  }

  #codeEscaping(symbol: number, sink: IntervalSink): void {
    const { totals, unseenFrom, suffix, alphabetSize } = this.#table;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    let context = this.#context;
    for (;;) {
      const total = totals[context];
      this.#count(1, 1);
      if (total > 0) {
        const entry = this.#find(context, symbol, encoder);
        // The decoder: where the escape begins, first entry, whether that is certain, escape or not.
        decoder.tableReads += 3;
        decoder.branches += 2;
        if (entry !== NONE) {
          this.#codeEntry(context, entry, total, sink);
          return;
        }
        encoder.tableReads += 2;
        sink.put(unseenFrom[context], total - unseenFrom[context], total);
      }
      this.#count(0, 1);
      if (context < this.#empty) break;
      this.#count(1, 0);
      context = suffix[context];
    }
    if (alphabetSize > 1) sink.put(symbol, 1, alphabetSize);
    this.#context = this.#nextEmpty(context);
  }

  #codeAtOrder(symbol: number, sink: IntervalSink): void {
    const { totals, unseenFrom, unseenFrequency, entryStart, alphabetSize } = this.#table;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    const context = this.#context;
    const total = totals[context];
    this.#count(1, 1);
    const entry = this.#find(context, symbol, encoder);
    if (total > 0) {
      // First entry, its frequency, where the unseen begin; whether certain, seen or not.
      decoder.tableReads += 3;
      decoder.branches += 2;
      if (entry !== NONE) {
        this.#codeEntry(context, entry, total, sink);
        return;
      }
      const rank = symbol - (this.#firstFrom(context, symbol, encoder) - entryStart[context]);
      const frequency = unseenFrequency[context];
      encoder.tableReads += 3;
      encoder.multiplies += 1;
      decoder.tableReads += 3;
      decoder.divides += 1;
      decoder.multiplies += 1;
      sink.put(unseenFrom[context] + rank * frequency, frequency, total);
      this.#searchUnseen(context, rank);
    } else if (alphabetSize > 1) {
      sink.put(symbol, 1, alphabetSize);
    }
    this.#context = this.#after(context, symbol);
  }

  /** A symbol that its context has: the rest of both ends. */
  #codeEntry(context: number, entry: number, total: number, sink: IntervalSink): void {
    const { lows, frequencies, next } = this.#table;
    const encoder = this.#encoder;
    const decoder = this.#decoder;
    encoder.tableReads += 1;
    encoder.branches += 1;
    this.#searchHolding(context, entry);
    if (frequencies[entry] < total) {
      this.#count(2, 0);
      sink.put(lows[entry], frequencies[entry], total);
    }
    encoder.tableReads += 1;
    decoder.tableReads += 2;
    this.#context = next[entry];
  }

  #count(tableReads: number, branches: number): void {
    this.#encoder.tableReads += tableReads;
    this.#encoder.branches += branches;
    this.#decoder.tableReads += tableReads;
    this.#decoder.branches += branches;
  }

  /** Both ends look for the next context in the same way. */
  #after(context: number, symbol: number): number {
    const { suffix, next } = this.#table;
    for (let shorter = context; ; shorter = suffix[shorter]) {
      this.#find(shorter, symbol, this.#decoder);
      const entry = this.#find(shorter, symbol, this.#encoder);
      if (entry !== NONE) {
        this.#count(1, 0);
        return next[entry];
      }
      this.#count(0, 1);
      if (shorter < this.#empty) return this.#nextEmpty(shorter);
      this.#count(1, 0);
    }
  }

  #nextEmpty(context: number): number {
    return context + 1 === this.#empty ? 0 : context + 1;
  }

  #firstFrom(context: number, symbol: number, end: OperationTally): number {
    const { entryStart, symbols } = this.#table;
    let from = entryStart[context];
    let to = entryStart[context + 1];
    end.tableReads += 2;
    while (from < to) {
      const middle = (from + to) >>> 1;
      end.tableReads += 1;
      end.branches += 2;
      if (symbols[middle] < symbol) from = middle + 1;
      else to = middle;
    }
    end.branches += 1;
    return from;
  }

  #find(context: number, symbol: number, end: OperationTally): number {
    const { entryStart, symbols } = this.#table;
    const entry = this.#firstFrom(context, symbol, end);
    end.tableReads += 1;
    end.branches += 1;
    if (entry >= entryStart[context + 1]) return NONE;
    end.tableReads += 1;
    end.branches += 1;
    return symbols[entry] === symbol ? entry : NONE;
  }

  /** The decoder's search for the entry whose interval holds the target. */
  #searchHolding(context: number, entry: number): void {
    const { entryStart } = this.#table;
    const decoder = this.#decoder;
    let from = entryStart[context];
    let to = entryStart[context + 1];
    decoder.tableReads += 2;
    while (to - from > 1) {
      const middle = (from + to) >>> 1;
      decoder.tableReads += 1;
      decoder.branches += 2;
      if (middle <= entry) from = middle;
      else to = middle;
    }
    decoder.branches += 1;
  }

  /** The decoder's search for the unseen symbol of a rank. */
  #searchUnseen(context: number, rank: number): void {
    const { entryStart, symbols } = this.#table;
    const decoder = this.#decoder;
    const first = entryStart[context];
    let from = first;
    let to = entryStart[context + 1];
    decoder.tableReads += 2;
    while (from < to) {
      const middle = (from + to) >>> 1;
      decoder.tableReads += 1;
      decoder.branches += 2;
      if (symbols[middle] - (middle - first) <= rank) from = middle + 1;
      else to = middle;
    }
    decoder.branches += 1;
  }
}
