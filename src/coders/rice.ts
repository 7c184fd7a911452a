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
 * Rice's codes: symbol v as ⌊v / 2^k⌋ in unary, zeros ended by a one, and the low k bits of v.
 *
 * Adaptive: k is the least with 2^(k+1) · count ≥ sum. That is the paper's rule 2^k · N ≥ A, in which A sums the sizes of
 * signed residues: the folded symbols here are about twice as large.
 */
export const riceFamily: IntegerFamily = {
  name: 'rice',
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

export const rice: CoderEntry = {
  declaration: integerDeclaration(riceFamily, {
    summary: 'Each symbol as a quotient by 2^k in unary and a remainder of k bits.',
    parameter: 'Bits of the remainder; not given, fitted by exact cost or adapted to the mean.',
    longestWord: '⌊(m − 1) / 2^k⌋ + 1 + k',
    source:
      'R. F. Rice, JPL Publication 79-22, 1979; adaptive: M. J. Weinberger, G. Seroussi, G. Sapiro, IEEE Trans. Image ' +
      'Processing 9(8), 2000',
  }),
  create: (values) => integerCoder(rice.declaration, riceFamily, values),
};

function wordBits(symbol: number, k: number): number {
  return (symbol >>> k) + 1 + k;
}

function adaptedK(mean: RunningMean): number {
  let k = 0;
  for (let reach = 2 * mean.count; reach < mean.sum; reach *= 2) k++;
  return k;
}

function encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number, k: number) {
  const mask = (1 << k) - 1;
  for (let i = from; i < to; i++) {
    const symbol = symbols[i];
    writeUnaryWord(writer, symbol >>> k, symbol & mask, k);
  }
}

function decode(
  reader: BitReader,
  symbols: SymbolArray,
  from: number,
  to: number,
  k: number,
  alphabetSize: number,
) {
  const most = (alphabetSize - 1) >>> k;
  for (let i = from; i < to; i++) {
    const quotient = readZeros(reader, most);
    const symbol = (quotient << k) | reader.readBits(k);
    if (symbol >= alphabetSize) refuseSymbol(reader, symbol, alphabetSize);
    symbols[i] = symbol;
  }
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
    writeUnaryWord(writer, symbol >>> k, symbol & ((1 << k) - 1), k);
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
    const k = adaptedK(mean);
    const quotient = readZeros(reader, (alphabetSize - 1) >>> k);
    const symbol = (quotient << k) | reader.readBits(k);
    if (symbol >= alphabetSize) refuseSymbol(reader, symbol, alphabetSize);
    symbols[i] = symbol;
    mean.add(symbol);
  }
}

function countWord(symbol: number, k: number, encoder: OperationTally, decoder: OperationTally) {
  countUnaryWord(symbol >>> k, k, encoder, decoder);
  // Whether the symbol lies in the alphabet.
  decoder.branches += 1;
}

/** The rule's loop is tested k + 1 times. */
function countAdapting(mean: RunningMean, tally: OperationTally): number {
  const k = adaptedK(mean);
  tally.branches += k + 1;
  return k;
}
