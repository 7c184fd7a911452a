import { constants } from 'node:zlib';
import type { CoderEntry, Declaration } from './contract.ts';
import { referenceCoder, referenceTraits } from './reference.ts';
import { deflateMethod } from './reference-library.ts';

const declaration: Declaration = {
  ...referenceTraits,
  name: 'deflate-huffman',
  summary:
    'Deflate without repeats: Huffman codes alone, fitted anew about every 16 384 bytes, by Node’s zlib.',
  parameters: [],
  policies: ['none'],
  worstCase: 'n bytes, 5 for each block of about 16 KiB, and up to 2 more',
  memory: 'the whole message; about 260 KiB to encode, 40 KiB to decode',
  source: 'Deutsch 1996, RFC 1951; the strategy Z_HUFFMAN_ONLY of zlib as built into Node',
};

/** A reference, and the pacer of timings: an order-0 prefix code whose tables follow the data. */
export const deflateHuffman: CoderEntry = {
  declaration,
  create: () =>
    // The level is of no consequence to this strategy, as long as it is not 0.
    referenceCoder(declaration, () =>
      deflateMethod({ level: 9, strategy: constants.Z_HUFFMAN_ONLY }),
    ),
};
