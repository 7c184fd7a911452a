import type { CoderEntry, Declaration } from './contract.ts';
import type { ParameterDeclaration } from './parameters.ts';
import { referenceCoder, referenceTraits } from './reference.ts';
import { deflateMethod } from './reference-library.ts';

/** How hard deflate searches for repeats. */
export const deflateLevel = {
  key: 'level',
  kind: 'integer',
  min: 1,
  max: 9,
  standard: 9,
  summary: 'how long the encoder searches for repeats: 1 fastest, 9 smallest',
} as const satisfies ParameterDeclaration;

const declaration: Declaration = {
  ...referenceTraits,
  name: 'deflate',
  summary: 'Raw deflate (repeats, then Huffman codes) by Node’s zlib, each message apart.',
  parameters: [deflateLevel],
  policies: ['none'],
  worstCase: 'n bytes, 5 for each block of about 16 KiB, and up to 2 more',
  memory: 'the whole message; about 260 KiB to encode, 40 KiB to decode',
  source: 'Deutsch 1996, RFC 1951; zlib as built into Node',
};

/** A reference: deflate without header and checksum. */
export const deflate: CoderEntry = {
  declaration,
  create: (values) =>
    referenceCoder(declaration, () => deflateMethod({ level: Number(values['level']) })),
};
