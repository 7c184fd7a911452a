import { ArithSettings } from '../coders/arith-settings.ts';
import { tablesFor } from '../coders/arith-tables.ts';
import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { type ExportedCoder, messageBuffers } from './exporter.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import { RANGE_ENDING_BITS, rangeIn, rangeOut } from './range-program.ts';
import { staticTables } from './static-arrays.ts';
import { staticIn, staticOut } from './static-program.ts';
import { checkedSymbols } from './symbol-program.ts';

const SYMBOLS_IN = `
fn decode_symbols(count) {
  begin_range();
  context = START;
  let i = 0;
  while (i < count && status == OK) {
    symbols[i] = get_symbol();
    i = i + 1;
  }
  if (status == OK) {
    end_range();
  }
}
`;

/** Wraps the loop over symbols into a code string. */
function symbolsOut(alphabetSize: number): string {
  return checkedSymbols(alphabetSize)
    .replace('put_word(', 'put_symbol(')
    .replace('let i = 0;', 'begin_range();\n  context = START;\n  let i = 0;')
    .replace(/\n}\n$/, '\n  end_range();\n}\n');
}

/** `arith` with static tables of order 0 to 2 and a range of 32 bits. */
export function exportArith(candidate: Candidate, setup: Setup): ExportedCoder {
  const settings = new ArithSettings(candidate.values);
  const { table } = tablesFor(setup, 'shipped');
  const { alphabetSize } = setup;
  const total = 2 ** settings.totalBits(alphabetSize);
  const { tables, start } = staticTables(table, total);
  const constants = new Map<string, number>([
    ...frameConstants(setup),
    ['ALPHABET', alphabetSize],
    ['TOTAL', total],
    ['POSITIONS', table.positions],
    ['START', start],
    ['NONE', 0xffffffff],
  ]);
  const buffers = messageBuffers(alphabetSize);
  const escapes = table.unseen === 'escape';
  const stageOut = rangeOut(setup.lengths);
  const stageIn = rangeIn(setup.lengths);
  return {
    encoder: {
      program: parseProgram(
        BITS_OUT,
        stageOut,
        staticOut(table),
        symbolsOut(alphabetSize),
        messageOut(setup),
      ),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables,
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(BITS_IN, stageIn, staticIn(table), SYMBOLS_IN, messageIn(setup)),
      entry: 'decode_message',
      entryGives: setup.lengths !== 'known',
      constants,
      tables,
      buffers: buffers.decoder,
    },
    longestSymbolBits: longestSymbol(escapes ? settings.order + 1 : 1, total, alphabetSize),
    endingBits: RANGE_ENDING_BITS,
    unseen: escapes
      ? 'A symbol that its context has not seen in training costs an escape to a shorter context; one never seen at all can be coded too.'
      : 'Every symbol has a share of every context that was met in training; in others all are equally likely.',
  };
}

/**
 * An interval of frequency 1 in a total T costs log2 T bits and, at a range of 2^24 and more, at most 1 bit for what the division
 * drops.
 */
function longestSymbol(intervals: number, total: number, alphabetSize: number): number {
  const last = Math.ceil(Math.log2(Math.max(2, alphabetSize))) + 1;
  return intervals * (Math.ceil(Math.log2(total)) + 1) + last;
}
