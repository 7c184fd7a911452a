import type { RecordLayout } from '../symbols/record-layout.ts';
import { numberOf } from './field-linear.ts';
import { BOUNDS, type FieldFacts, orderedValue } from './field-plan.ts';

/** Records part by part, as choices are made on them. */
export interface FieldColumns {
  readonly layout: RecordLayout;
  readonly recordCount: number;
  /** One array a part. */
  readonly values: readonly Uint32Array[];
  /** The same as the numbers that they stand for. */
  readonly numbers: readonly Float64Array[];
  /** For each record how many precede it in its contexts, at most 2. */
  readonly ages: Uint8Array;
}

/**
 * Takes apart whole records.
 * @param bytes  of all records, one after another
 * @param starts for each record 1 where contexts begin
 */
export function columnsOf(
  layout: RecordLayout,
  bytes: Uint8Array,
  starts: Uint8Array,
): FieldColumns {
  const recordCount = starts.length;
  const values = layout.names.map(() => new Uint32Array(recordCount));
  const numbers = layout.names.map(() => new Float64Array(recordCount));
  const ages = new Uint8Array(recordCount);
  const record = new Uint32Array(layout.partCount);
  for (let i = 0; i < recordCount; i++) {
    layout.takeApart(bytes, i * layout.bytes, record);
    for (let part = 0; part < record.length; part++) {
      values[part][i] = record[part];
      numbers[part][i] = numberOf(record[part], 32 - layout.widths[part], layout.signed[part]);
    }
    ages[i] = starts[i] === 1 || i === 0 ? 0 : Math.min(2, ages[i - 1] + 1);
  }
  return { layout, recordCount, values, numbers, ages };
}

/**
 * Median and size classes of a part's values in the records: classes hold about an eighth each,
 * equal values stay together.
 * @param beside  the part whose value is taken off before the median is found
 */
export function factsOf(
  columns: FieldColumns,
  part: number,
  records: Uint32Array,
  beside?: number,
): FieldFacts {
  const width = columns.layout.widths[part];
  const signed = columns.layout.signed[part];
  const own = columns.values[part];
  const values = Uint32Array.from(records, (record) => own[record]);
  const sorted = sortedValues(values, width, signed);
  return {
    reference:
      beside === undefined
        ? medianOf(sorted, width, signed)
        : distanceBeside(columns, part, records, beside),
    bounds: boundsOf(sorted, 2 ** width),
  };
}

/** Median of the distance of a part's values to those of another, modulo 2^width. */
export function distanceBeside(
  columns: FieldColumns,
  part: number,
  records: Uint32Array,
  beside: number,
): number {
  const width = columns.layout.widths[part];
  const own = columns.values[part];
  const other = columns.numbers[beside];
  const shift = 32 - width;
  const distances = Uint32Array.from(
    records,
    (record) => ((own[record] - other[record]) << shift) >>> shift,
  );
  return medianOf(sortedValues(distances, width, 1), width, 1);
}

function sortedValues(values: Uint32Array, width: number, signed: number): Uint32Array {
  return values.map((value) => orderedValue(value, width, signed)).sort();
}

function medianOf(sorted: Uint32Array, width: number, signed: number): number {
  const count = sorted.length;
  return count === 0 ? 0 : orderedValue(sorted[Math.floor((count - 1) / 2)], width, signed);
}

function boundsOf(sorted: Uint32Array, top: number): number[] {
  const count = sorted.length;
  const bounds: number[] = [];
  let from = 0;
  while (bounds.length < BOUNDS) {
    // What is left is parted evenly among the classes that are left, so that a frequent value does
    // not empty them.
    const share = Math.floor((count - from) / (BOUNDS + 1 - bounds.length));
    let to = from + Math.max(1, share);
    while (to < count && sorted[to] === sorted[to - 1]) to++;
    if (to >= count) break;
    bounds.push(sorted[to]);
    from = to;
  }
  while (bounds.length < BOUNDS) bounds.push(top);
  return bounds;
}
