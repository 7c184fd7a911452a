import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import type { OperationTally } from '../models/counting-tally.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { CoderEntry } from './contract.ts';
import { countUnaryWord } from './cost-integer-words.ts';
import { DivisorChoice, divisorWidth, LARGEST_DIVISOR } from './golomb-choice.ts';
import { integerCoder, integerDeclaration } from './integer-coder.ts';
import type { IntegerFamily } from './integer-family.ts';
import type { RunningMean } from './integer-mean.ts';
import { readZeros, refuseSymbol, writeUnaryWord } from './integer-words.ts';

/**
 * Golomb's codes: symbol v as ⌊v / m⌋ in unary, zeros ended by a one, and the remainder in truncated binary: with
 * b = ⌈log2 m⌉ the first 2^b − m remainders take b − 1 bits, the others b.
 */
export const golombFamily: IntegerFamily = {
  name: 'golomb',
  key: 'm',
  least: 1,
  greatest: LARGEST_DIVISOR,
  greatestUseful: (alphabetSize) => Math.min(LARGEST_DIVISOR, alphabetSize),
  wordBits,
  chooser: () => new DivisorChoice(),
  encode,
  decode,
  encodeAdaptive,
  decodeAdaptive,
  countWord,
  countAdapting,
};

export const golomb: CoderEntry = {
  declaration: integerDeclaration(golombFamily, {
    summary: 'Each symbol as a quotient in unary and a remainder in truncated binary.',
    parameter: 'The divisor; not given, fitted by exact cost or adapted to the mean.',
    longestWord: '⌊(size − 1) / m⌋ + 1 + ⌈log2 m⌉, for an alphabet of that size',
    source:
      'S. W. Golomb, IEEE Trans. Inf. Theory 12(3), 1966; R. G. Gallager, D. C. Van Voorhis, IEEE Trans. Inf. Theory 21(2), 1975',
  }),
  create: (values) => integerCoder(golomb.declaration, golombFamily, values),
};

function wordBits(symbol: number, m: number): number {
  const quotient = Math.floor(symbol / m);
  const width = divisorWidth(m);
  const isShort = symbol - quotient * m < (1 << width) - m;
  return quotient + 1 + (isShort ? width - 1 : width);
}

/**
 * The divisor of Gallager's and Van Voorhis' rule for a geometric source of this mean μ: the least m with θ^m + θ^(m+1) ≤ 1,
 * θ = μ / (1 + μ). Its expansion for large μ, ⌈μ ln 2 − (1 − ln 2) / 2⌉, in 65 536ths.
 */
export function adaptedDivisor(mean: RunningMean): number {
  const { sum, count } = mean;
  return Math.max(1, Math.ceil((45_426 * sum - 10_055 * count) / (65_536 * count)));
}

function writeWord(writer: BitWriter, symbol: number, m: number, width: number): void {
  const quotient = (symbol / m) | 0;
  const remainder = symbol - quotient * m;
  const short = (1 << width) - m;
  if (remainder < short) writeUnaryWord(writer, quotient, remainder, width - 1);
  else writeUnaryWord(writer, quotient, remainder + short, width);
}

function readWord(reader: BitReader, m: number, width: number, alphabetSize: number): number {
  const quotient = readZeros(reader, ((alphabetSize - 1) / m) | 0);
  const short = (1 << width) - m;
  let remainder = width === 0 ? 0 : reader.readBits(width - 1);
  if (width > 0 && remainder >= short) remainder = 2 * remainder + reader.readBits(1) - short;
  const symbol = quotient * m + remainder;
  if (symbol >= alphabetSize) refuseSymbol(reader, symbol, alphabetSize);
  return symbol;
}

function encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number, m: number) {
  const width = divisorWidth(m);
  for (let i = from; i < to; i++) writeWord(writer, symbols[i], m, width);
}

function decode(
  reader: BitReader,
  symbols: SymbolArray,
  from: number,
  to: number,
  m: number,
  alphabetSize: number,
) {
  const width = divisorWidth(m);
  for (let i = from; i < to; i++) symbols[i] = readWord(reader, m, width, alphabetSize);
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
    const m = adaptedDivisor(mean);
    writeWord(writer, symbol, m, divisorWidth(m));
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
    const m = adaptedDivisor(mean);
    const symbol = readWord(reader, m, divisorWidth(m), alphabetSize);
    symbols[i] = symbol;
    mean.add(symbol);
  }
}

/**
 * Encoder: quotient, its product, whether the remainder is a short one. Decoder: the longest quotient, the product; twice
 * whether there is a remainder at all, then whether it is a long one; whether the symbol lies in the alphabet.
 */
function countWord(symbol: number, m: number, encoder: OperationTally, decoder: OperationTally) {
  const quotient = Math.floor(symbol / m);
  const width = divisorWidth(m);
  const isShort = symbol - quotient * m < (1 << width) - m;
  countUnaryWord(quotient, isShort ? width - 1 : width, encoder, decoder);
  encoder.divides += 1;
  encoder.multiplies += 1;
  encoder.branches += 1;
  decoder.divides += 1;
  decoder.multiplies += 1;
  decoder.branches += width > 0 ? 4 : 3;
}

/** Sum and count are weighed and divided; the quotient is held to 1 at least. */
function countAdapting(mean: RunningMean, tally: OperationTally): number {
  tally.multiplies += 2;
  tally.divides += 1;
  tally.branches += 1;
  return adaptedDivisor(mean);
}
