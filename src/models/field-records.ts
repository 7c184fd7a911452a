import type { FieldPredictor } from './field-predictor.ts';
import type { TokenReader, TokenWriter } from './field-tables.ts';
import { EXTRA_BITS, LEAST_VALUE, tokenOf } from './field-token.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';

/**
 * Extra bits go in pieces of at most so many: small totals cost a range of 32 bits nothing to speak
 * of.
 */
export const PIECE_BITS = 12;

/**
 * Codes the record at `bytes[at …]`: one step of a message, after which the predictor stands at the
 * next record. Intervals go to the sink part by part.
 */
export function codeRecord(
  predictor: FieldPredictor,
  tables: TokenWriter,
  bytes: Uint8Array,
  at: number,
  sink: IntervalSink,
): void {
  const parts = predictor.values.length;
  predictor.plan.layout.takeApart(bytes, at, predictor.values);
  for (let part = 0; part < parts; part++) codePart(predictor, tables, part, sink);
  predictor.advance();
}

/**
 * Codes one part of the record whose values the predictor holds: a token, then its extra bits as
 * equally likely.
 */
export function codePart(
  predictor: FieldPredictor,
  tables: TokenWriter,
  part: number,
  sink: IntervalSink,
): void {
  const table = predictor.tableOf(part);
  const residual = predictor.split(part);
  const token = tokenOf(residual);
  tables.put(table, token, sink);
  for (let left = EXTRA_BITS[token]; left > 0; ) {
    const piece = Math.min(PIECE_BITS, left);
    left -= piece;
    const size = 1 << piece;
    sink.put((residual >>> left) & (size - 1), 1, size);
  }
}

/** Decodes one record to `bytes[at …]`, which must be zeros. */
export function decodeRecord(
  predictor: FieldPredictor,
  tables: TokenReader,
  source: IntervalSource,
  bytes: Uint8Array,
  at: number,
): void {
  const parts = predictor.values.length;
  for (let part = 0; part < parts; part++) {
    const token = tables.take(predictor.tableOf(part), source);
    let residual = LEAST_VALUE[token];
    for (let left = EXTRA_BITS[token]; left > 0; ) {
      const piece = Math.min(PIECE_BITS, left);
      left -= piece;
      const bits = source.target(1 << piece);
      source.take(bits, 1);
      residual += bits * 2 ** left;
    }
    predictor.join(part, residual);
  }
  predictor.plan.layout.putTogether(predictor.values, bytes, at);
  predictor.advance();
}

/**
 * Counts the tokens of a record in the slots of their tables, as {@link codeRecord} would use them.
 */
export function countRecord(
  predictor: FieldPredictor,
  counts: Float64Array,
  bytes: Uint8Array,
  at: number,
): void {
  const { plan, values } = predictor;
  plan.layout.takeApart(bytes, at, values);
  for (let part = 0; part < values.length; part++) {
    const table = predictor.tableOf(part);
    counts[plan.slotStart[table] + tokenOf(predictor.split(part))]++;
  }
  predictor.advance();
}
