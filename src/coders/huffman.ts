import { InputError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import { PrefixEncoder } from '../stages/prefix-encoder.ts';
import type { Coder, CoderEntry, Declaration, Setup, Tables } from './contract.ts';
import { PREFIX_WINDOW_BYTES, prefixCosts, prefixOperations } from './cost-prefix.ts';
import { sentPrefixCosts, sentPrefixOperations } from './cost-sent-prefix.ts';
import { symbolWidth } from './fixed.ts';
import { sentReader, shippedReader } from './huffman-decoder.ts';
import { messageEncoder, streamEncoder } from './huffman-encoder.ts';
import { wordFiller } from './huffman-filler.ts';
import { decodeWordsInPieces, huffmanPricer } from './huffman-pieces.ts';
import { priceHuffman } from './huffman-price.ts';
import {
  addedCount,
  describeHuffman,
  HuffmanFit,
  type HuffmanTables,
  huffmanTables,
  huffmanTrainer,
} from './huffman-tables.ts';
import type { ParameterValues, Rational } from './parameters.ts';

const declaration: Declaration = {
  name: 'huffman',
  summary: 'Each symbol as a word of a canonical code of least mean length.',
  parameters: [
    {
      key: 'maxbits',
      kind: 'integer',
      min: 1,
      max: 32,
      standard: 24,
      summary: 'Longest code word, in bits; with 24 a decoder finds any word in one 32-bit load.',
    },
    {
      key: 'unseen',
      kind: 'word',
      words: ['add:X'],
      standard: 'add:1/2',
      summary: 'Shipped tables: X is added to every count, so that each symbol has a word.',
    },
  ],
  policies: ['shipped', 'sent'],
  resets: ['message', 'file', 'never'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 2 ** 24,
  worstCase: 'n · maxbits bits for shipped tables; n · ⌈log2 m⌉ bits and the table for sent ones',
  memory:
    'encoder 5 bytes a symbol (256 KiB more for bytes in long messages); decoder 4 bytes a word ' +
    'and a table of 32 KiB (bytes) or up to 256 KiB; fitting 60 bytes a symbol',
  source:
    'D. A. Huffman, Proc. IRE 40(9), 1952; limit: L. L. Larmore, D. S. Hirschberg, J. ACM 37(3), 1990',
};

/**
 * Huffman coding of single symbols.
 *
 * `sent`: the table stands before the words of the message it was fitted to; under reset `never` in
 * the first message that has symbols. Where only one symbol occurs its word is empty: the table
 * names it, and its repetitions cost nothing.
 */
export const huffman: CoderEntry = { declaration, create: (values) => createHuffman(values) };

function createHuffman(values: ParameterValues): Coder {
  const maxBits = Number(values['maxbits']);
  const added = addedCount(String(values['unseen']));
  // Shipped tables are made once, however many units are coded with them.
  const shippedEncoders = new WeakMap<Tables, PrefixEncoder>();
  const shippedDecoders = new WeakMap<Tables, PrefixDecoder>();

  function shippedEncoder(setup: Setup): PrefixEncoder {
    const tables = huffmanTables(setup);
    let encoder = shippedEncoders.get(tables);
    if (encoder === undefined) {
      const { table } = fitTables(tables, setup, maxBits, added);
      encoder = new PrefixEncoder(setup.alphabetSize);
      encoder.setWords(table.symbols, table.lengths, table.count);
      shippedEncoders.set(tables, encoder);
    }
    return encoder;
  }

  function shippedDecoder(setup: Setup): PrefixDecoder {
    const tables = huffmanTables(setup);
    let decoder = shippedDecoders.get(tables);
    if (decoder === undefined) {
      const { table } = fitTables(tables, setup, maxBits, added);
      decoder = new PrefixDecoder(setup.alphabetSize);
      decoder.setWords(table.symbols, table.lengths, table.count, Number.POSITIVE_INFINITY);
      shippedDecoders.set(tables, decoder);
    }
    return decoder;
  }

  return {
    declares: declaration,

    check(setup) {
      if (!declaration.policies.includes(setup.policy)) {
        throw new InputError(`huffman has no table policy ${setup.policy}`, {
          coder: 'huffman',
          expected: declaration.policies.join(', '),
        });
      }
      if (setup.alphabetSize > declaration.maxAlphabetSize) {
        throw new InputError('the alphabet is too large for huffman', {
          coder: 'huffman',
          expected: `at most ${declaration.maxAlphabetSize} symbols`,
          got: String(setup.alphabetSize),
        });
      }
      const least = symbolWidth(setup.alphabetSize);
      if (maxBits < least) {
        throw new InputError(`${setup.alphabetSize} symbols need words of up to ${least} bits`, {
          coder: 'huffman',
          key: 'maxbits',
          expected: `at least ${least}`,
          got: String(maxBits),
          advice: `Give maxbits=${least} or more.`,
        });
      }
    },

    trainer: huffmanTrainer,

    encoder(setup) {
      if (setup.policy === 'shipped')
        return streamEncoder(setup, shippedEncoder(setup), undefined, 0);
      if (setup.reset === 'message') return messageEncoder(setup, maxBits);
      const { table } = fitTables(huffmanTables(setup), setup, maxBits, added);
      const words = new PrefixEncoder(setup.alphabetSize);
      words.setWords(table.symbols, table.lengths, table.count);
      return streamEncoder(setup, words, table, maxBits);
    },

    filler(setup) {
      if (setup.policy !== 'shipped') return undefined;
      return wordFiller(setup, shippedEncoder(setup));
    },

    growsSteadily: (setup) => setup.policy !== 'sent',

    decoder(setup, limits) {
      if (setup.policy === 'shipped') return shippedReader(setup, limits, shippedDecoder(setup));
      return sentReader(setup, limits, maxBits);
    },

    inPieces: {
      decode: (input, setup, limits, taker) =>
        decodeWordsInPieces(
          input,
          setup,
          limits,
          taker,
          maxBits,
          setup.policy === 'shipped' ? shippedDecoder(setup) : undefined,
        ),
      pricer: (setup) => huffmanPricer(setup, added),
    },

    costs: (setup, _longestCodedBytes, sequence) =>
      setup.policy === 'shipped'
        ? prefixCosts(
            fitTables(huffmanTables(setup), setup, maxBits, added).table,
            setup.alphabetSize,
            setup.lengths,
          )
        : sentPrefixCosts(sequence, setup, maxBits),

    operations: (sequence, setup) =>
      setup.policy === 'shipped'
        ? prefixOperations(fitTables(huffmanTables(setup), setup, maxBits, added).table, sequence)
        : sentPrefixOperations(sequence, setup, maxBits),

    decoderHolds: () => PREFIX_WINDOW_BYTES,

    price: (sequence, setup) => priceHuffman(sequence, setup, added),

    describeTables(tables, setup) {
      const own = huffmanTables({ ...setup, tables });
      return describeHuffman(own, setup, fitTables(own, setup, maxBits, added), maxBits);
    },
  };
}

function fitTables(
  tables: HuffmanTables,
  setup: Setup,
  maxBits: number,
  added: Rational,
): HuffmanFit {
  const fit = new HuffmanFit(maxBits);
  if (setup.policy === 'shipped') fit.fitSmoothed(tables.counts, added);
  else fit.fitPresent(tables.counts);
  return fit;
}
