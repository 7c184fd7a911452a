import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import {
  fieldConstants,
  fieldPlanArrays,
  fieldShape,
  longestRecordBits,
  tokenArray,
} from '../coders/fields-arrays.ts';
import { countedInRecords, tablesFor } from '../coders/fields-tables.ts';
import { PIECE_BITS } from '../models/field-records.ts';
import { TABLE_BITS, TABLE_TOTAL } from '../models/field-weights.ts';
import { type ExportedCoder, messageBuffers } from './exporter.ts';
import { recordIn, recordOut, sharedFields } from './field-program.ts';
import { FIELDS_OUT, fieldsIn } from './field-steps.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import { RANGE_ENDING_BITS, rangeIn, rangeOut } from './range-program.ts';

/** `fields` with shipped tables and a range of 32 bits: one record step for all, and what each field is as tables. */
export function exportFields(_candidate: Candidate, setup: Setup): ExportedCoder {
  const { plan, frequencies } = tablesFor(setup, 'shipped');
  const { layout } = plan;
  const shape = fieldShape(plan);
  const tables = [...fieldPlanArrays(plan), tokenArray(plan, frequencies)];
  const constants = new Map<string, number>([
    ...frameConstants(countedInRecords(setup, layout)),
    ...fieldConstants(plan),
    ['TOTAL', TABLE_TOTAL],
    ['PIECE', PIECE_BITS],
  ]);
  const buffers = messageBuffers(setup.alphabetSize);
  return {
    encoder: {
      program: parseProgram(
        BITS_OUT,
        rangeOut(setup.lengths),
        sharedFields(shape),
        recordOut(shape),
        FIELDS_OUT,
        messageOut(setup),
      ),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables,
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(
        BITS_IN,
        rangeIn(setup.lengths),
        sharedFields(shape),
        recordIn(shape),
        fieldsIn(setup.lengths === 'known'),
        messageIn(setup),
      ),
      entry: 'decode_message',
      entryGives: setup.lengths !== 'known',
      constants,
      tables,
      buffers: buffers.decoder,
    },
    longestSymbolBits: Math.ceil(longestRecordBits(plan, TABLE_BITS) / layout.bytes),
    endingBits: RANGE_ENDING_BITS,
    unseen:
      'Every value of every field can be coded; one unlike those of the train part takes up to 15 bits and its width.',
  };
}
