import { BitWriter } from '../bits/bit-writer.ts';
import { CountingFields } from '../models/counting-fields.ts';
import { OperationTally } from '../models/counting-tally.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { StaticFieldTables } from '../models/field-tables.ts';
import { CountingRange } from '../stages/counting-range.ts';
import { RangeEncoder } from '../stages/range-encoder.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Setup } from './contract.ts';
import type { EndOperations } from './cost.ts';
import type { FieldsSettings } from './fields-settings.ts';
import { adaptiveTablesFor, startsAtMessages, tablesFor } from './fields-tables.ts';

/** Codes every record and counts; the end of a code string is not counted. */
export function fieldsOperations(
  settings: FieldsSettings,
  { symbols, messageEnds }: SymbolSequence,
  setup: Setup,
): EndOperations {
  const encoder = new OperationTally();
  const decoder = new OperationTally();
  const isAdaptive = setup.policy !== 'shipped';
  const counting = (() => {
    if (isAdaptive) {
      const { plan, tables } = adaptiveTablesFor(settings, setup);
      return new CountingFields(new FieldPredictor(plan), tables, true, encoder, decoder);
    }
    const { plan, frequencies } = tablesFor(setup, 'shipped');
    const tables = new StaticFieldTables(plan, frequencies);
    return new CountingFields(new FieldPredictor(plan), tables, false, encoder, decoder);
  })();
  const stage = new RangeEncoder(new BitWriter(), settings.rangeBits);
  const sink = new CountingRange(stage, encoder, decoder);
  let from = 0;
  for (const to of messageEnds) {
    if (startsAtMessages(setup)) counting.reset();
    stage.beginApart();
    for (; from < to; from += counting.recordBytes)
      counting.code(symbols as Uint8Array, from, sink);
  }
  return { encoder: encoder.counts(), decoder: decoder.counts() };
}
