import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { addedCount, HuffmanFit, huffmanTables } from '../coders/huffman-tables.ts';
import type { PrefixTable } from '../stages/prefix-table.ts';
import { type ExportedCoder, messageBuffers } from './exporter.ts';
import { BITS_IN, BITS_OUT, frameConstants, messageIn, messageOut } from './frame-program.ts';
import { parseProgram } from './language-parser.ts';
import {
  prefixConstants,
  prefixIn,
  prefixInTables,
  prefixOut,
  prefixOutTables,
} from './prefix-program.ts';
import { checkedSymbols, DECODED_SYMBOLS } from './symbol-program.ts';

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
        checkedSymbols(alphabetSize),
        messageOut(setup),
      ),
      entry: 'encode_message',
      entryGives: false,
      constants,
      tables: prefixOutTables(table),
      buffers: buffers.encoder,
    },
    decoder: {
      program: parseProgram(BITS_IN, prefixIn(table), DECODED_SYMBOLS, messageIn(setup)),
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
