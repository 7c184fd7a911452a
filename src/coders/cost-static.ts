import { BitWriter } from '../bits/bit-writer.ts';
import { CountingStatic } from '../models/counting-static.ts';
import { OperationTally } from '../models/counting-tally.ts';
import type { StaticTable } from '../models/static-table.ts';
import { CountingRange } from '../stages/counting-range.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { RangeBits } from '../stages/range-precision.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Lengths } from './contract.ts';
import {
  type BothEnds,
  type CodeEstimate,
  type EndCost,
  type EndOperations,
  endCost,
  integerBytes,
} from './cost.ts';
import { MEASURED, measuredCosts } from './cost-measured.ts';

/** With 48 bits: search, escape, narrow, carry, shift, end; search, escape, narrow, shift, end. */
const STATIC_CODE: BothEnds<CodeEstimate> = {
  encoder: { statements: 44, nestedCalls: 3 },
  decoder: { statements: 48, nestedCalls: 3 },
};

/** Low or code, range, and a position of 4 bytes; integers of 48 bits lie in 8 bytes. */
export const rangeStateBytes = (bits: RangeBits): number => 2 * (bits === 32 ? 4 : 8) + 4;

/**
 * Bytes of the tables of a static model, the same at both ends.
 *
 * Contexts are all strings of up to k symbols that occurred, or begin a message. For each: where its entries begin (and
 * once where the last ends), from order 1 on the context without its oldest symbol, where the unseen symbols' interval begins; under
 * `unseen=add:X` also one unseen symbol's frequency. For each entry: symbol, lower end of its interval, next context. A
 * frequency is the distance to the next lower end, so is not stored, nor is the total, which is one for all.
 */
export function staticTableBytes(table: StaticTable): number {
  const { alphabetSize, order, length, symbols, totals, unseen } = table;
  let contexts = 0;
  let total = 0;
  for (let context = 0; context < length.length; context++) {
    if (length[context] > order) continue;
    contexts++;
    total = Math.max(total, totals[context]);
  }
  const placeBytes = integerBytes(symbols.length);
  const contextBytes = integerBytes(contexts - 1);
  const frequencyBytes = integerBytes(total);
  const unseenBytes = typeof unseen === 'object' ? 2 * frequencyBytes : frequencyBytes;
  return (
    (contexts + 1) * placeBytes +
    contexts * ((order === 0 ? 0 : contextBytes) + unseenBytes) +
    symbols.length * (integerBytes(alphabetSize - 1) + frequencyBytes + contextBytes)
  );
}

/**
 * Costs of a static model on a range coder. With a range of 32 bits, as exported: the encoder keeps one byte, and how many of
 * 255 follow it, for a carry. With 48, which has no exported form, estimates: the stage's state and one context number; and
 * since a carry may run back to a message's first byte, the encoder holds its coded message.
 */
export function staticCosts(
  table: StaticTable,
  bits: RangeBits,
  lengths: Lengths,
  longestCodedBytes: number,
): BothEnds<EndCost> {
  const flashBytes = staticTableBytes(table);
  if (bits === 32) {
    const form = table.unseen === 'escape' ? MEASURED.staticEscape : MEASURED.staticAdded;
    return measuredCosts(form, lengths, { encoder: flashBytes, decoder: flashBytes });
  }
  let contexts = 0;
  for (const length of table.length) if (length <= table.order) contexts++;
  const stateBytes = rangeStateBytes(bits) + integerBytes(contexts - 1);
  return {
    encoder: endCost(flashBytes, stateBytes + longestCodedBytes, STATIC_CODE.encoder),
    decoder: endCost(flashBytes, stateBytes, STATIC_CODE.decoder),
  };
}

/** Codes every message from its start contexts and counts; the end of a code string is not counted. */
export function staticOperations(
  table: StaticTable,
  bits: RangeBits,
  { symbols, messageEnds }: SymbolSequence,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const stage = new RangeEncoder(new BitWriter(), bits);
  const counting = new CountingStatic(table, encoder, decoder);
  const sink = new CountingRange(stage, encoder, decoder);
  let from = 0;
  for (const to of messageEnds) {
    counting.reset();
    stage.beginApart();
    counting.code(symbols, from, to, sink);
    from = to;
  }
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
