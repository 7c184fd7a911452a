import { arith } from './arith.ts';
import { blockHuffman } from './block-huffman.ts';
import { brotli } from './brotli.ts';
import type { CoderEntry } from './contract.ts';
import { deflate } from './deflate.ts';
import { deflateHuffman } from './deflate-huffman.ts';
import { deflatePreset } from './deflate-preset.ts';
import { expGolomb } from './exp-golomb.ts';
import { fields } from './fields.ts';
import { fixed } from './fixed.ts';
import { golomb } from './golomb.ts';
import { huffman } from './huffman.ts';
import { rice } from './rice.ts';

/** Every coder there is, in the order in which screens list them. Adding a coder is one line here and one file. */
export const coderEntries: readonly CoderEntry[] = [
  fixed,
  huffman,
  blockHuffman,
  golomb,
  rice,
  expGolomb,
  arith,
  fields,
  deflate,
  deflateHuffman,
  deflatePreset,
  brotli,
];
