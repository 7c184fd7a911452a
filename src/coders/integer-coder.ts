import { InputError } from '../errors/errors.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Declaration, Price, Setup } from './contract.ts';
import { INTEGER_WINDOW_BYTES, integerCosts, integerOperations } from './cost-integer.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { integerDecoder } from './integer-decoder.ts';
import { integerEncoder } from './integer-encoder.ts';
import type { IntegerFamily } from './integer-family.ts';
import { integerFiller } from './integer-filler.ts';
import {
  type IntegerTables,
  integerTables,
  integerTrainer,
  parameterBits,
} from './integer-tables.ts';
import type { ParameterValues } from './parameters.ts';

/** What the declarations of the families do not share. */
export interface IntegerWords {
  readonly summary: string;
  /** What the parameter is. */
  readonly parameter: string;
  /** Length of the longest word, in words and symbols. */
  readonly longestWord: string;
  readonly source: string;
}

/** Declaration of the coder of a family, its parameter not given. */
export function integerDeclaration(family: IntegerFamily, words: IntegerWords): Declaration {
  return {
    name: family.name,
    summary: words.summary,
    parameters: [
      {
        key: family.key,
        kind: 'integer',
        min: family.least,
        max: family.greatest,
        optional: true,
        summary: `${words.parameter} Given: no tables.`,
      },
    ],
    policies: ['shipped', 'sent', 'learned', 'primed'],
    resets: ['message', 'file', 'never'],
    needsWholeMessage: false,
    reference: false,
    maxAlphabetSize: 2 ** 24,
    worstCase: `n · (${words.longestWord}) bits; stored=on bounds it`,
    memory:
      'two integers at each end; fitting 12 bytes a symbol of the alphabet, and the message under sent with reset message',
    source: words.source,
  };
}

/**
 * The coder of a family.
 *
 * A given parameter is all that both ends need to know: the coder then has no table policy. Otherwise the parameter is
 * chosen by exact cost, on the train split (`shipped`) or on what it is sent with (`sent`: before the words of each message
 * that has symbols, or of the first such), or it follows from the mean of the symbols before (`learned`, `primed`).
 */
export function integerCoder(
  declaration: Declaration,
  family: IntegerFamily,
  values: ParameterValues,
): Coder {
  const given = values[family.key] as number | undefined;
  const declares: Declaration =
    given === undefined ? declaration : { ...declaration, policies: ['none'], resets: ['message'] };
  return {
    declares,

    check(setup) {
      if (!declares.policies.includes(setup.policy)) {
        throw new InputError(`${family.name} has no table policy ${setup.policy} here`, {
          coder: family.name,
          expected: declares.policies.join(', '),
          got: setup.policy,
          advice:
            given === undefined
              ? `Give ${family.key}= for a code without tables.`
              : `Leave ${family.key}= out for a code that is fitted or learns.`,
        });
      }
      if (setup.alphabetSize > declares.maxAlphabetSize) {
        throw new InputError(`the alphabet is too large for ${family.name}`, {
          coder: family.name,
          expected: `at most ${declares.maxAlphabetSize} symbols`,
          got: String(setup.alphabetSize),
        });
      }
    },

    ...(given === undefined
      ? {
          trainer: (setup: Setup) => integerTrainer(family, setup),
          describeTables: (tables, setup) => describe(family, { ...setup, tables }),
        }
      : {}),

    encoder: (setup) => integerEncoder(family, setup, given),

    filler: (setup) => integerFiller(family, setup, given),

    // Every word has a bit or more; and one more symbol shortens no code, so also not the best, whose parameter has a fixed width.
    growsSteadily: () => true,

    decoder: (setup, limits) => integerDecoder(family, setup, limits, given),

    costs: (setup, _longestCodedBytes, sequence) => integerCosts(family.name, setup, sequence),

    operations: (sequence, setup) => integerOperations(family, sequence, setup, given),

    decoderHolds: () => INTEGER_WINDOW_BYTES,

    price: (sequence, setup) => price(family, sequence, setup, given),
  };
}

/**
 * ideal = payload: the words stand for themselves. Taken from the encoder, without count and padding, less the parameters
 * that it sends. fit: the best parameter for the whole sequence.
 */
function price(
  family: IntegerFamily,
  sequence: SymbolSequence,
  setup: Setup,
  given: number | undefined,
): Price {
  const encoder = integerEncoder(family, { ...setup, lengths: 'known', align: 1 }, given);
  encoder.push(sequence);
  const { messageEndsBits, payloadBits } = encoder.finish();
  const isSent = given === undefined && setup.policy === 'sent';
  const sentBits = isSent ? parameterBits(family, setup.alphabetSize) : 0;
  const messageIdealBits = new Float64Array(messageEndsBits.length);
  let isDue = isSent;
  let fromBits = 0;
  for (let i = 0; i < messageIdealBits.length; i++) {
    const bits = messageEndsBits[i] - fromBits;
    messageIdealBits[i] = isDue && bits > 0 ? bits - sentBits : bits;
    if (bits > 0 && setup.reset !== 'message') isDue = false;
    fromBits = messageEndsBits[i];
  }
  const counts = new SymbolCounts(setup.alphabetSize);
  counts.add(sequence.symbols, 0, sequence.symbols.length);
  const { bits } = family.chooser().choose(counts);
  return { idealBits: payloadBits, messageIdealBits, fit: { bits, of: { order: 0 } } };
}

function describe(family: IntegerFamily, setup: Setup): string[] {
  const tables: IntegerTables = integerTables(family, setup);
  const { parameter, bits, sum, count } = tables;
  if (count === 0) return [`nothing was counted: ${family.key}=${parameter}, words of one length`];
  return [
    `${count} symbols counted, mean ${(sum / count).toFixed(2)}`,
    `${family.key}=${parameter}: ${(bits / count).toFixed(3)} bits a symbol`,
  ];
}
