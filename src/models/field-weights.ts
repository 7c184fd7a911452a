import type { Quantiser } from './quantise.ts';

/**
 * Counts of one field's tables as weights in which no token has none.
 *
 * A context counts four tokens more, spread as in all contexts of the field together; there every
 * token counts 1/16 more. The first record's table, and that of a field without context, stand
 * alone: every token counts 1/8 more.
 */

/** A token met once, so that shares of the added counts are whole numbers. */
const ONE = 1024;
const ADDED = 4 * ONE;
const TRIFLE = ONE / 8;

/** Total of quantised frequencies. */
export const TABLE_BITS = 14;
export const TABLE_TOTAL = 2 ** TABLE_BITS;

/**
 * Fills `weights[from …]` from `counts` at the same places: `tables` tables of `tokens` each, the
 * first one that of first records.
 *
 * Weights are integers ≥ 1; up to 2^28 records, they and their products with a total stay below 2^53.
 */
export function weighTables(
  counts: Float64Array,
  weights: Float64Array,
  from: number,
  tables: number,
  tokens: number,
): void {
  const common = new Float64Array(tokens);
  let all = tokens;
  for (let table = 1; table < tables; table++) {
    for (let token = 0; token < tokens; token++) {
      const count = 16 * counts[from + table * tokens + token];
      common[token] += count;
      all += count;
    }
  }
  for (let token = 0; token < tokens; token++) {
    weights[from + token] = ONE * counts[from + token] + TRIFLE;
    const added = tables > 2 ? 1 + Math.floor((ADDED * (common[token] + 1)) / all) : TRIFLE;
    for (let table = 1; table < tables; table++) {
      const at = from + table * tokens + token;
      weights[at] = ONE * counts[at] + added;
    }
  }
}

/** The tables of {@link weighTables}, each brought to a total of {@link TABLE_TOTAL}. */
export function quantiseTables(
  quantiser: Quantiser,
  weights: Float64Array,
  frequencies: Uint32Array,
  from: number,
  tables: number,
  tokens: number,
): void {
  for (let table = 0; table < tables; table++) {
    const at = from + table * tokens;
    quantiser.quantise(weights, frequencies, at, at + tokens, TABLE_TOTAL);
  }
}
