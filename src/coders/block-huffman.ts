import { InputError } from '../errors/errors.ts';
import { type BlockReader, blockDecoder, shippedBlockReader } from './block-huffman-decoder.ts';
import { BlockWords, fitBlocks, messageEncoder, unitEncoder } from './block-huffman-encoder.ts';
import { blockFiller } from './block-huffman-filler.ts';
import { MOST_NGRAMS, ngramSpace } from './block-huffman-ngrams.ts';
import { priceBlocks } from './block-huffman-price.ts';
import { blockTables, blockTrainer, describeBlocks } from './block-huffman-tables.ts';
import type { Coder, CoderEntry, Declaration, Setup, Tables } from './contract.ts';
import { blockCosts } from './cost-blocks.ts';
import { blockOperations } from './cost-blocks-operations.ts';
import { PREFIX_WINDOW_BYTES } from './cost-prefix.ts';
import { sentBlockCosts, sentBlockOperations } from './cost-sent-prefix.ts';
import { symbolWidth } from './fixed.ts';
import type { ParameterValues } from './parameters.ts';

const declaration: Declaration = {
  name: 'block-huffman',
  summary: 'Each block of n symbols as one word of a canonical code of least mean length.',
  parameters: [
    { key: 'n', kind: 'integer', min: 1, max: 4, summary: 'Symbols in a block.' },
    {
      key: 'maxbits',
      kind: 'integer',
      min: 1,
      max: 32,
      standard: 24,
      summary: 'Longest code word, in bits.',
    },
  ],
  policies: ['shipped', 'sent'],
  resets: ['message', 'file', 'never'],
  needsWholeMessage: false,
  reference: false,
  maxAlphabetSize: 2 ** 24,
  worstCase:
    'an escape of maxbits bits and n · ⌈log2 m⌉ bits for each block; a whole table with sent ones',
  memory: `about 100 bytes a distinct block, at most ${MOST_NGRAMS} of them; 12 bytes a symbol`,
  source:
    'D. A. Huffman, Proc. IRE 40(9), 1952; blocks: C. E. Shannon, Bell Syst. Tech. J. 27, 1948, s. 9',
};

/**
 * Huffman coding of non-overlapping blocks of n symbols, from the first symbol of each message on.
 * The last r < n symbols of a message are coded singly with a second code.
 *
 * `shipped`: a block never trained is an escape, then its n symbols in ⌈log2 m⌉ bits each; the
 * second code gives each symbol count + 1/2. `sent`: each table stands in the first message that
 * needs it (under reset `message` in each), before its words: no last symbols, no second table.
 */
export const blockHuffman: CoderEntry = { declaration, create: (values) => createBlock(values) };

function createBlock(values: ParameterValues): Coder {
  const n = Number(values['n']);
  const maxBits = Number(values['maxbits']);
  // Shipped tables are made once, however many units are coded with them.
  const shippedWords = new WeakMap<Tables, BlockWords>();
  const shippedReaders = new WeakMap<Tables, BlockReader>();

  function wordsOf(setup: Setup): BlockWords {
    const tables = blockTables(setup, n);
    let words = shippedWords.get(tables);
    if (words === undefined) {
      words = new BlockWords(fitBlocks(tables, setup, maxBits), n, setup.alphabetSize);
      shippedWords.set(tables, words);
    }
    return words;
  }

  function readerOf(setup: Setup): BlockReader {
    const tables = blockTables(setup, n);
    let reader = shippedReaders.get(tables);
    if (reader === undefined) {
      reader = shippedBlockReader(fitBlocks(tables, setup, maxBits), n, setup.alphabetSize);
      shippedReaders.set(tables, reader);
    }
    return reader;
  }

  return {
    declares: declaration,

    check(setup) {
      if (!declaration.policies.includes(setup.policy)) {
        throw new InputError(`block-huffman has no table policy ${setup.policy}`, {
          coder: 'block-huffman',
          expected: declaration.policies.join(', '),
        });
      }
      const { alphabetSize } = setup;
      if (
        alphabetSize > declaration.maxAlphabetSize ||
        ngramSpace(alphabetSize, n) > Number.MAX_SAFE_INTEGER
      ) {
        throw new InputError(`blocks of ${n} from ${alphabetSize} symbols are too many to number`, {
          coder: 'block-huffman',
          key: 'n',
          expected: `at most ${declaration.maxAlphabetSize} symbols, and fewer than 2^53 blocks`,
          got: `${alphabetSize}^${n}`,
          advice: 'Take a smaller n.',
        });
      }
      const least = symbolWidth(alphabetSize);
      if (maxBits < least) {
        throw new InputError(`${alphabetSize} symbols need words of up to ${least} bits`, {
          coder: 'block-huffman',
          key: 'maxbits',
          expected: `at least ${least}`,
          got: String(maxBits),
          advice: `Give maxbits=${least} or more.`,
        });
      }
    },

    trainer: (setup) => blockTrainer(setup, n),

    encoder(setup) {
      if (setup.policy === 'shipped')
        return unitEncoder(setup, n, wordsOf(setup), undefined, maxBits);
      if (setup.reset === 'message') return messageEncoder(setup, n, maxBits);
      const fit = fitBlocks(blockTables(setup, n), setup, maxBits);
      return unitEncoder(setup, n, new BlockWords(fit, n, setup.alphabetSize), fit, maxBits);
    },

    filler: (setup) =>
      setup.policy === 'shipped' ? blockFiller(setup, n, wordsOf(setup)) : undefined,

    decoder(setup, limits) {
      const shipped = setup.policy === 'shipped' ? readerOf(setup) : undefined;
      return blockDecoder(setup, limits, n, maxBits, shipped);
    },

    costs: (setup, _longestCodedBytes, sequence) =>
      setup.policy === 'shipped'
        ? blockCosts(fitBlocks(blockTables(setup, n), setup, maxBits), n, setup)
        : sentBlockCosts(sequence, setup, n, maxBits),

    operations: (sequence, setup) =>
      setup.policy === 'shipped'
        ? blockOperations(fitBlocks(blockTables(setup, n), setup, maxBits), n, sequence)
        : sentBlockOperations(sequence, setup, n, maxBits),

    decoderHolds: () => PREFIX_WINDOW_BYTES,

    price: (sequence, setup) => priceBlocks(sequence, setup, n),

    describeTables(tables, setup) {
      const own = blockTables({ ...setup, tables }, n);
      return describeBlocks(own, setup, fitBlocks(own, setup, maxBits), maxBits);
    },
  };
}
