import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import type { OperationTally } from '../models/counting-tally.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { CoderEntry } from './contract.ts';
import { countUnaryWord } from './cost-integer-words.ts';
import { symbolWidth } from './fixed.ts';
import { integerCoder, integerDeclaration } from './integer-coder.ts';
import { chooseByTrial, type IntegerFamily } from './integer-family.ts';
import type { RunningMean } from './integer-mean.ts';
import { readZeros, refuseSymbol, writeUnaryWord } from './integer-words.ts';

/**
 * Exponential Golomb codes of order k: v + 2^k in binary, before it as many zeros as it has bits beyond k + 1. Words grow
 * with the logarithm of v, so a rare large symbol costs little; order 0 is Elias' γ of v + 1.
 *
 * Adaptive: k is the least with 3 · 2^k · count ≥ sum: words of the two shortest lengths, which the symbols below 3 · 2^k have, then
 * reach the mean. Twice 2^k would suit geometric sources by some hundredths of a bit, and lose more on those with long
 * tails, for which the family is made.
 */
export const expGolombFamily: IntegerFamily = {
  name: 'exp-golomb',
  key: 'k',
  least: 0,
  greatest: 24,
  greatestUseful: symbolWidth,
  wordBits,
  chooser: () => chooseByTrial(0, symbolWidth, wordBits),
  encode,
  decode,
  encodeAdaptive,
  decodeAdaptive,
  countWord,
  countAdapting,
};

export const expGolomb: CoderEntry = {
  declaration: integerDeclaration(expGolombFamily, {
    summary: 'Each symbol plus 2^k in binary after as many zeros as it has further bits.',
    parameter:
      'Order: the 2^k smallest symbols share the shortest words; not given, fitted or adapted.',
    longestWord: '2 · ⌊log2(m − 1 + 2^k)⌋ + 1 − k',
    source:
      'J. Teuhola, Information Processing Letters 7(6), 1978; order 0: ITU-T H.264, clause 9.1',
  }),
  create: (values) => integerCoder(expGolomb.declaration, expGolombFamily, values),
};

/** Bits of v + 2^k below its leading one. */
function lowBits(symbol: number, k: number): number {
  return 31 - Math.clz32(symbol + (1 << k));
}

function wordBits(symbol: number, k: number): number {
  return 2 * lowBits(symbol, k) + 1 - k;
}

function adaptedK(mean: RunningMean): number {
  let k = 0;
  for (let reach = 3 * mean.count; reach < mean.sum; reach *= 2) k++;
  return k;
}

function encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number, k: number) {
  const offset = 1 << k;
  for (let i = from; i < to; i++) {
    const number = symbols[i] + offset;
    const width = 31 - Math.clz32(number);
    writeUnaryWord(writer, width - k, number - (1 << width), width);
  }
}

function readNumber(reader: BitReader, k: number, alphabetSize: number): number {
  const width = k + readZeros(reader, lowBits(alphabetSize - 1, k) - k);
  const symbol = (1 << width) + reader.readBits(width) - (1 << k);
  if (symbol >= alphabetSize) refuseSymbol(reader, symbol, alphabetSize);
  return symbol;
}

function decode(
  reader: BitReader,
  symbols: SymbolArray,
  from: number,
  to: number,
  k: number,
  alphabetSize: number,
) {
  for (let i = from; i < to; i++) symbols[i] = readNumber(reader, k, alphabetSize);
}

function encodeAdaptive(
  writer: BitWriter,
  symbols: SymbolArray,
  from: number,
  to: number,
  mean: RunningMean,
) {
  for (let i = from; i < to; i++) {
    const symbol = symbols[i];
    const k = adaptedK(mean);
    const number = symbol + (1 << k);
    const width = 31 - Math.clz32(number);
    writeUnaryWord(writer, width - k, number - (1 << width), width);
    mean.add(symbol);
  }
}

function decodeAdaptive(
  reader: BitReader,
  symbols: SymbolArray,
  from: number,
  to: number,
  mean: RunningMean,
  alphabetSize: number,
) {
  for (let i = from; i < to; i++) {
    const symbol = readNumber(reader, adaptedK(mean), alphabetSize);
    symbols[i] = symbol;
    mean.add(symbol);
  }
}

function countWord(symbol: number, k: number, encoder: OperationTally, decoder: OperationTally) {
  const width = lowBits(symbol, k);
  countUnaryWord(width - k, width, encoder, decoder);
  // Whether the symbol lies in the alphabet.
  decoder.branches += 1;
}

/** The rule's loop is tested k + 1 times. */
function countAdapting(mean: RunningMean, tally: OperationTally): number {
  const k = adaptedK(mean);
  tally.branches += k + 1;
  return k;
}
