import type { FieldContext } from '../symbols/field-choice.ts';
import { contextKindOf, tableCountOf } from './field-plan.ts';
import type { FieldSeries, Residuals } from './field-series.ts';
import { EXTRA_BITS, tokenCount } from './field-token.ts';
import { quantiseTables, weighTables } from './field-weights.ts';
import { Quantiser } from './quantise.ts';
import { COST_PER_BIT, tableCosts } from './table-cost.ts';

/** The records are parted into so many runs of equal length. */
const RUNS = 16;

/**
 * For each record 1 where it trains and 0 where it is priced: runs by turns, so that what lasts for
 * a while in the records, as a season or a kind of cargo, is on both sides.
 */
export function trainingRecords(recordCount: number): Uint8Array {
  const length = Math.max(1, Math.ceil(recordCount / RUNS));
  return Uint8Array.from({ length: recordCount }, (_, i) => 1 - (Math.floor(i / length) & 1));
}

/** Prices one way to code a part after another: tables of {@link trainingRecords} price the others. */
export class FieldPricer {
  readonly #series: FieldSeries;
  readonly #trains: Uint8Array;
  readonly #quantiser = new Quantiser();
  readonly #costs = tableCosts();

  constructor(series: FieldSeries, trains: Uint8Array) {
    this.#series = series;
    this.#trains = trains;
  }

  /**
   * Cost of the records that do not train, in 1/65536 bit.
   * @param first  tokens of a message's first record, one a record
   */
  cost(part: number, first: Uint8Array, residuals: Residuals, context: FieldContext): number {
    const { recordCount, ages, layout } = this.#series.columns;
    const { tokens, buckets } = residuals;
    const size = tokenCount(layout.widths[part]);
    const tables = tableCountOf(contextKindOf({ transform: 'raw', context }));
    const classes = this.#series.contextClasses(part, context);
    const own = context.kind === 'last';
    const counts = new Float64Array(2 * tables * size);
    const priced = tables * size;
    for (let i = 0; i < recordCount; i++) {
      let slot: number;
      if (ages[i] === 0) slot = first[i];
      else if (own) slot = tokens[i] + size * (ages[i] === 1 ? 1 : 2 + buckets[i - 1]);
      else slot = tokens[i] + size * (classes === undefined ? 1 : 1 + classes[i]);
      counts[this.#trains[i] === 1 ? slot : priced + slot]++;
    }
    return this.#price(counts, tables, size);
  }

  /** Cost of first records among those that do not train; with `everyRecord`, were each a message's first. */
  firstCost(part: number, first: Uint8Array, everyRecord: boolean): number {
    const { recordCount, ages, layout } = this.#series.columns;
    const size = tokenCount(layout.widths[part]);
    const counts = new Float64Array(2 * size);
    for (let i = 0; i < recordCount; i++)
      if (everyRecord || ages[i] === 0) counts[first[i] + (this.#trains[i] === 1 ? 0 : size)]++;
    return this.#price(counts, 1, size);
  }

  /** @param counts  of the records that train, then of the others */
  #price(counts: Float64Array, tables: number, size: number): number {
    const slots = tables * size;
    const weights = new Float64Array(slots);
    const frequencies = new Uint32Array(slots);
    weighTables(counts, weights, 0, tables, size);
    quantiseTables(this.#quantiser, weights, frequencies, 0, tables, size);
    let cost = 0;
    for (let slot = 0; slot < slots; slot++) {
      const times = counts[slots + slot];
      if (times === 0) continue;
      cost += times * (this.#costs[frequencies[slot]] + EXTRA_BITS[slot % size] * COST_PER_BIT);
    }
    return cost;
  }
}
