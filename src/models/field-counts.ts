import type { FieldPlan } from './field-plan.ts';
import type { TokenReader, TokenWriter } from './field-tables.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';

/** What a count grows by; a token never met weighs 1. */
export const STEP = 16;

/** A table is halved when its total passes this. */
export const LARGEST_TOTAL = 2 ** 15;

/** What a journal remembers at least. */
const LEAST_JOURNAL = 1024;

/**
 * Adaptive tables. A reset puts back only what was counted since the last, unless that is much:
 * then all of it.
 *
 * Memory: 2 bytes a slot, twice with the state to return to, and a byte a slot for the journal.
 */
export class AdaptiveFieldTables implements TokenWriter, TokenReader {
  readonly #slotStart: Uint32Array;
  readonly #counts: Uint16Array;
  readonly #totals: Uint32Array;
  readonly #firstCounts: Uint16Array;
  readonly #firstTotals: Uint32Array;
  /** Table and slot of each count since the last reset. */
  readonly #journal: Uint32Array;
  /** Entries in use; more than there is room for when the journal no longer tells all. */
  #journalLength = 0;

  /** @param trained  the state that a reset returns to; absent: every token weighs 1 */
  constructor(plan: FieldPlan, trained?: AdaptiveFieldTables) {
    const { slotStart, slotCount, tableCount } = plan;
    this.#slotStart = slotStart;
    if (trained === undefined) {
      this.#firstCounts = new Uint16Array(slotCount).fill(1);
      this.#firstTotals = new Uint32Array(tableCount);
      for (let table = 0; table < tableCount; table++)
        this.#firstTotals[table] = slotStart[table + 1] - slotStart[table];
    } else {
      this.#firstCounts = trained.#counts.slice();
      this.#firstTotals = trained.#totals.slice();
    }
    this.#counts = this.#firstCounts.slice();
    this.#totals = this.#firstTotals.slice();
    this.#journal = new Uint32Array(2 * Math.max(LEAST_JOURNAL, slotCount >>> 3));
  }

  reset(): void {
    const journal = this.#journal;
    if (this.#journalLength > journal.length) {
      this.#counts.set(this.#firstCounts);
      this.#totals.set(this.#firstTotals);
    } else {
      for (let i = 0; i < this.#journalLength; i += 2) {
        const table = journal[i];
        const slot = journal[i + 1];
        this.#totals[table] = this.#firstTotals[table];
        this.#counts[slot] = this.#firstCounts[slot];
      }
    }
    this.#journalLength = 0;
  }

  put(table: number, token: number, sink: IntervalSink): void {
    const counts = this.#counts;
    const from = this.#slotStart[table];
    const slot = from + token;
    let low = 0;
    for (let i = from; i < slot; i++) low += counts[i];
    sink.put(low, counts[slot], this.#totals[table]);
    this.#count(table, slot);
  }

  take(table: number, source: IntervalSource): number {
    const counts = this.#counts;
    const from = this.#slotStart[table];
    const target = source.target(this.#totals[table]);
    let slot = from;
    let low = 0;
    while (low + counts[slot] <= target) low += counts[slot++];
    source.take(low, counts[slot]);
    this.#count(table, slot);
    return slot - from;
  }

  #count(table: number, slot: number): void {
    if (this.#journalLength < this.#journal.length) {
      this.#journal[this.#journalLength] = table;
      this.#journal[this.#journalLength + 1] = slot;
      this.#journalLength += 2;
    } else {
      this.#journalLength = this.#journal.length + 1;
    }
    this.#counts[slot] += STEP;
    this.#totals[table] += STEP;
    if (this.#totals[table] > LARGEST_TOTAL) this.#halve(table);
  }

  #halve(table: number): void {
    const counts = this.#counts;
    const to = this.#slotStart[table + 1];
    let total = 0;
    for (let slot = this.#slotStart[table]; slot < to; slot++) {
      counts[slot] = (counts[slot] + 1) >>> 1;
      total += counts[slot];
    }
    this.#totals[table] = total;
    // Every slot of the table has changed: a reset puts back everything.
    this.#journalLength = this.#journal.length + 1;
  }
}
