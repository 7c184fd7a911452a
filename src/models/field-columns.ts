import type { RecordLayout } from '../symbols/record-layout.ts';
import { BOUNDS, type FieldFacts, orderedValue } from './field-plan.ts';

/** Records part by part, as choices are made on them. */
export interface FieldColumns {
  readonly layout: RecordLayout;
  readonly recordCount: number;
  /** One array a part. */
  readonly values: readonly Uint32Array[];
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
  const ages = new Uint8Array(recordCount);
  const record = new Uint32Array(layout.partCount);
  for (let i = 0; i < recordCount; i++) {
    layout.takeApart(bytes, i * layout.bytes, record);
    for (let part = 0; part < record.length; part++) values[part][i] = record[part];
    ages[i] = starts[i] === 1 || i === 0 ? 0 : Math.min(2, ages[i - 1] + 1);
  }
  return { layout, recordCount, values, ages };
}

/**
 * Median and size classes of the first `count` values of a part: classes hold about an eighth each,
 * equal values stay together.
 */
export function factsOf(columns: FieldColumns, part: number, count: number): FieldFacts {
  const width = columns.layout.widths[part];
  const signed = columns.layout.signed[part];
  const values = columns.values[part];
  const sorted = new Uint32Array(count);
  for (let i = 0; i < count; i++) sorted[i] = orderedValue(values[i], width, signed);
  sorted.sort();
  const top = 2 ** width;
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
  const median = count === 0 ? 0 : sorted[Math.floor((count - 1) / 2)];
  return { reference: count === 0 ? 0 : orderedValue(median, width, signed), bounds };
}
