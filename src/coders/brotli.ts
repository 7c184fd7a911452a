import type { CoderEntry, Declaration } from './contract.ts';
import { referenceCoder, referenceTraits } from './reference.ts';
import { brotliMethod } from './reference-library.ts';

const declaration: Declaration = {
  ...referenceTraits,
  name: 'brotli',
  summary: 'Brotli (repeats, contexts, a built-in dictionary of web text) by Node’s zlib.',
  parameters: [
    {
      key: 'quality',
      kind: 'integer',
      min: 0,
      max: 11,
      standard: 11,
      summary:
        'how long the encoder searches: 0 fastest, 11 smallest and on long text about 15 times slower than 9',
    },
  ],
  policies: ['none'],
  worstCase: 'n bytes and a few',
  memory:
    'the whole message; a window of up to 4 MiB at both ends, and far more to encode at 10 and 11',
  source: 'Alakuijala and Szabadka 2016, RFC 7932; the library built into Node',
};

/** A reference: the strongest coder that comes with Node. */
export const brotli: CoderEntry = {
  declaration,
  create: (values) => referenceCoder(declaration, () => brotliMethod(Number(values['quality']))),
};
