import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { addedCount, HuffmanFit, huffmanTables } from '../coders/huffman-tables.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import type { ExportedCoder } from './exporter.ts';
import { messageBuffers } from './exporter.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import {
  prefixConstants,
  prefixIn,
  prefixInTables,
  prefixOut,
  prefixOutTables,
} from './prefix-program.ts';

const SYMBOLS_OUT = `
fn encode_symbols(count) {
  let i = 0;
  while (i < count && status == OK) {
    let symbol = symbols[i];
    if (symbol >= ALPHABET) {
      status = SYMBOL;
      return 0;
    }
    put_word(symbol);
    i = i + 1;
  }
}
`;

const SYMBOLS_IN = `
fn decode_symbols(count) {
  let i = 0;
  while (i < count && status == OK) {
    symbols[i] = get_word();
    i = i + 1;
  }
}
`;

/** Symbols above the alphabet cannot stand in a narrow array that the alphabet fills. */
function symbolCheck(alphabetSize: number, program: string): string {
  if (alphabetSize !== 256 && alphabetSize !== 65536) return program;
  return program.replace(/ {4}if \(symbol >= ALPHABET\) \{[^}]*\}\n/, '');
}

/** `huffman` with shipped tables. */
export function exportHuffman(candidate: Candidate, setup: Setup): ExportedCoder {
  const fit = new HuffmanFit(Number(candidate.values['maxbits']));
  fit.fitSmoothed(huffmanTables(setup).counts, addedCount(String(candidate.values['unseen'])));
  const table: PrefixTable = fit.table;
  const { alphabetSize } = setup;
  const buffers = messageBuffers(alphabetSize);
  const frame = frameConstants(setup);
  const constants = new Map([
    ...frame,
    ...prefixConstants(table),
    ['ALPHABET', alphabetSize] as const,
  ]);
  const lengths = table.lengths.subarray(0, table.count);
  return {
    encoder: {
      program: parseProgram(
        BITS_OUT,
        prefixOut(table),
        symbolCheck(alphabetSize, SYMBOLS_OUT),
        messageOut(setup),
      ),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables: prefixOutTables(table),
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(BITS_IN, prefixIn(table), SYMBOLS_IN, messageIn(setup)),
      entry: 'decode_message',
      entryGives: setup.lengths !== 'known',
      constants,
      tables: prefixInTables(table),
      buffers: buffers.decoder,
    },
    longestSymbolBits: lengths.reduce((most, length) => Math.max(most, length), 0),
    endingBits: 0,
    unseen:
      'Every symbol of the alphabet has a word; one that was never seen in training has one of the longest.',
  };
}
