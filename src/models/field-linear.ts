import type { FieldColumns } from './field-columns.ts';

/**
 * Linear prediction of a field: its value before, and a weighted sum of
 * - a constant;
 * - its own last change;
 * - of each input field its change (in this record where it is coded earlier, else in the last) and
 *   its last distance from this field.
 *
 * Weights are whole numbers of 1/4096, below 8 in magnitude, so that a sum is a whole number below
 * 2^53 for all values of 32 bits: see field-least-squares.ts.
 */

/** A weight of 1. */
export const WEIGHT_ONE = 2 ** 12;

/** What the constant's weight multiplies, so that it reaches ±2048. */
export const CONSTANT = 256;

/** Weights without an input; each input adds {@link WEIGHTS_AN_INPUT}. */
const OWN_WEIGHTS = 2;
const WEIGHTS_AN_INPUT = 2;

/** Number of weights of one class. */
export const weightCount = (inputs: number): number => OWN_WEIGHTS + WEIGHTS_AN_INPUT * inputs;

/** A value as the number it stands for; `shift` is 32 − width. */
export const numberOf = (value: number, shift: number, signed: number): number =>
  signed === 1 ? (value << shift) >> shift : value;

/** Changes larger than this many times their upper quartile are left out of the fit. */
const CUT = 32;
const LEAST_CUT = 8;

/** The records of a part from which weights are fitted, with all that may enter the sum. */
export interface LinearRows {
  /** One column a weight, {@link OWN_WEIGHTS} first, then those of each input. */
  readonly columns: readonly Float64Array[];
  /** Changes of the part, to be predicted. */
  readonly changes: Float64Array;
  /** The record of each row. */
  readonly records: Uint32Array;
}

/** Gathers rows from those of the records that are not a message's first and change not far out. */
export function linearRows(
  columns: FieldColumns,
  part: number,
  inputs: readonly number[],
  from: Uint32Array,
): LinearRows {
  const { ages, layout, values, numbers } = columns;
  const shift = 32 - layout.widths[part];
  const own = values[part];
  const changes = new Float64Array(from.length);
  const records = new Uint32Array(from.length);
  let count = 0;
  for (const record of from) {
    if (ages[record] === 0) continue;
    changes[count] = ((own[record] - own[record - 1]) << shift) >> shift;
    records[count++] = record;
  }
  const sizes = changes.slice(0, count).map(Math.abs).sort();
  const most = Math.max(LEAST_CUT, count === 0 ? 0 : CUT * sizes[Math.floor((3 * count) / 4)]);
  let kept = 0;
  for (let row = 0; row < count; row++) {
    if (Math.abs(changes[row]) > most) continue;
    changes[kept] = changes[row];
    records[kept++] = records[row];
  }
  const rows = records.subarray(0, kept);
  const made = [new Float64Array(kept).fill(CONSTANT), changesBefore(numbers[part], ages, rows)];
  for (const input of inputs) {
    const other = numbers[input];
    made.push(
      input < part ? changesNow(other, rows) : changesBefore(other, ages, rows),
      distancesBefore(numbers[part], other, rows),
    );
  }
  return { columns: made, changes: changes.subarray(0, kept), records: rows };
}

const changesNow = (numbers: Float64Array, records: Uint32Array): Float64Array =>
  Float64Array.from(records, (i) => numbers[i] - numbers[i - 1]);

const changesBefore = (
  numbers: Float64Array,
  ages: Uint8Array,
  records: Uint32Array,
): Float64Array =>
  Float64Array.from(records, (i) => (ages[i] === 1 ? 0 : numbers[i - 1] - numbers[i - 2]));

const distancesBefore = (
  own: Float64Array,
  other: Float64Array,
  records: Uint32Array,
): Float64Array => Float64Array.from(records, (i) => other[i - 1] - own[i - 1]);

/** Columns of the own weights and of those of the inputs at these places among a row's. */
export function columnsOfInputs(places: readonly number[]): number[] {
  const columns = [0, 1];
  for (const place of places)
    columns.push(
      OWN_WEIGHTS + WEIGHTS_AN_INPUT * place,
      OWN_WEIGHTS + WEIGHTS_AN_INPUT * place + 1,
    );
  return columns;
}

/** The rows with the columns of the inputs at these places only. */
export function rowsOfInputs(rows: LinearRows, places: readonly number[]): LinearRows {
  return { ...rows, columns: columnsOfInputs(places).map((column) => rows.columns[column]) };
}
