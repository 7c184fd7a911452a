import { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import type { FieldPlan } from '../models/field-plan.ts';
import { FieldPredictor } from '../models/field-predictor.ts';
import { decodeRecord } from '../models/field-records.ts';
import { StaticFieldTables, type TokenReader } from '../models/field-tables.ts';
import { RangeDecoder } from '../stages/range-decoder.ts';
import { newSymbolArray } from '../symbols/sequence.ts';
import type { CodedInput, Decoded, DecodeLimits, Decoder, Setup } from './contract.ts';
import { continuationOf } from './fields-encoder.ts';
import type { FieldsSettings } from './fields-settings.ts';
import {
  adaptiveTablesFor,
  countedInRecords,
  startsAtMessages,
  tablesFor,
} from './fields-tables.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/**
 * A message may claim more records than its bytes hold; room is made for about so many bytes at a
 * time.
 */
const ROOM_BYTES = 1 << 16;

export function fieldsDecoder(
  settings: FieldsSettings,
  setup: Setup,
  limits: DecodeLimits,
): Decoder {
  return { decode: (input) => decode(settings, setup, limits, input) };
}

function readerFor(
  settings: FieldsSettings,
  setup: Setup,
): { plan: FieldPlan; tables: TokenReader } {
  if (setup.policy !== 'shipped') return adaptiveTablesFor(settings, setup);
  const { plan, frequencies } = tablesFor(setup, 'shipped');
  return { plan, tables: new StaticFieldTables(plan, frequencies) };
}

function decode(
  settings: FieldsSettings,
  setup: Setup,
  limits: DecodeLimits,
  input: CodedInput,
): Decoded {
  const { alphabetSize } = setup;
  const { plan, tables } = readerFor(settings, setup);
  const size = plan.layout.bytes;
  const reader = new BitReader(input.bytes);
  const stage = new RangeDecoder(reader, settings.rangeBits);
  const walk = new MessageWalk(reader, countedInRecords(setup, plan.layout), input, limits);
  const predictor = new FieldPredictor(plan);
  const continuation = continuationOf(setup.lengths);
  const roomRecords = Math.ceil(ROOM_BYTES / size);
  let symbols = newSymbolArray(alphabetSize, 0) as Uint8Array;
  let filled = 0;
  let message = 0;
  for (let count = walk.next(); count >= 0; count = walk.next(), message++) {
    if (count % size !== 0) {
      throw new CorruptStreamError('a message is not a whole number of records', {
        messageIndex: message,
        expected: `a multiple of ${size} bytes`,
        got: `${count} bytes`,
      });
    }
    if (startsAtMessages(setup)) {
      predictor.start();
      tables.reset();
    }
    stage.begin();
    for (let left = count / size; left > 0; ) {
      const block = Math.min(left, roomRecords);
      symbols = growSymbols(symbols, alphabetSize, filled, block * size) as Uint8Array;
      for (let i = 0; i < block; i++) {
        decodeRecord(predictor, tables, stage, symbols, filled);
        filled += size;
      }
      left -= block;
    }
    walk.close(stage.end(continuation));
  }
  return {
    sequence: {
      alphabetSize,
      symbols: symbols.subarray(0, filled),
      messageEnds: walk.messageEnds,
    },
    bitsConsumed: reader.position,
  };
}
