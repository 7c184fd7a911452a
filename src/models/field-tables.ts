import type { FieldPlan } from './field-plan.ts';
import { TABLE_BITS, TABLE_TOTAL } from './field-weights.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';

/** Frequencies of tokens, table by table, as an encoder or a meter uses them. */
export interface TokenWriter {
  /** Begins a reset unit. */
  reset(): void;
  put(table: number, token: number, sink: IntervalSink): void;
}

/** The same as a decoder uses them. */
export interface TokenReader {
  reset(): void;
  take(table: number, source: IntervalSource): number;
}

/** Targets are looked up by their upper bits. */
const LOOK_BITS = 8;
const LOOK_SHIFT = TABLE_BITS - LOOK_BITS;

/**
 * Static tables of a total of 2^14 each. No token of a table has it all, since each keeps a
 * frequency.
 *
 * Memory: 8 bytes a slot; for a decoder 256 bytes a table more.
 */
export class StaticFieldTables implements TokenWriter, TokenReader {
  readonly #slotStart: Uint32Array;
  readonly #frequencies: Uint32Array;
  readonly #lows: Uint32Array;
  /** For each table and upper bits of a target the first token that may hold it. */
  #firstTokens: Uint8Array | undefined;

  /** @param frequencies  of all slots of the plan, each ≥ 1 */
  constructor(plan: FieldPlan, frequencies: Uint32Array) {
    this.#slotStart = plan.slotStart;
    this.#frequencies = frequencies;
    this.#lows = new Uint32Array(frequencies.length);
    fillLows(plan.slotStart, frequencies, this.#lows);
  }

  reset(): void {}

  put(table: number, token: number, sink: IntervalSink): void {
    const slot = this.#slotStart[table] + token;
    sink.put(this.#lows[slot], this.#frequencies[slot], TABLE_TOTAL);
  }

  take(table: number, source: IntervalSource): number {
    this.#firstTokens ??= this.#lookUps();
    const lows = this.#lows;
    const frequencies = this.#frequencies;
    const target = source.target(TABLE_TOTAL);
    const from = this.#slotStart[table];
    let slot = from + this.#firstTokens[(table << LOOK_BITS) | (target >>> LOOK_SHIFT)];
    while (lows[slot] + frequencies[slot] <= target) slot++;
    source.take(lows[slot], frequencies[slot]);
    return slot - from;
  }

  #lookUps(): Uint8Array {
    const tables = this.#slotStart.length - 1;
    const first = new Uint8Array(tables << LOOK_BITS);
    for (let table = 0; table < tables; table++) {
      const from = this.#slotStart[table];
      let slot = from;
      for (let upper = 0; upper < 1 << LOOK_BITS; upper++) {
        while (this.#lows[slot] + this.#frequencies[slot] <= upper << LOOK_SHIFT) slot++;
        first[(table << LOOK_BITS) | upper] = slot - from;
      }
    }
    return first;
  }
}

/** Tables of exact weights, for prices only: their totals may pass what a stage codes. */
export class ExactFieldTables implements TokenWriter {
  readonly #slotStart: Uint32Array;
  readonly #weights: Float64Array;
  readonly #lows: Float64Array;
  readonly #totals: Float64Array;

  constructor(plan: FieldPlan, weights: Float64Array) {
    this.#slotStart = plan.slotStart;
    this.#weights = weights;
    this.#lows = new Float64Array(weights.length);
    this.#totals = fillLows(plan.slotStart, weights, this.#lows);
  }

  reset(): void {}

  put(table: number, token: number, sink: IntervalSink): void {
    const slot = this.#slotStart[table] + token;
    sink.put(this.#lows[slot], this.#weights[slot], this.#totals[table]);
  }
}

/** Sums before each slot within its table; gives back the sum of each table. */
function fillLows(
  slotStart: Uint32Array,
  frequencies: Uint32Array | Float64Array,
  lows: Uint32Array | Float64Array,
): Float64Array {
  const totals = new Float64Array(slotStart.length - 1);
  for (let table = 0; table < totals.length; table++) {
    let low = 0;
    for (let slot = slotStart[table]; slot < slotStart[table + 1]; slot++) {
      lows[slot] = low;
      low += frequencies[slot];
    }
    totals[table] = low;
  }
  return totals;
}
