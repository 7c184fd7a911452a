import { SeededGenerator } from '../statistics/generator.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import { type CalibrationSource, entropyTerm } from './calibrate-source.ts';

/**
 * One word repeated without end, begun at a random place of it: rate 0 from the order on at which the predecessors tell the
 * place in the word.
 * @param word  no repetition of a shorter word
 */
export function periodicSource(
  name: string,
  description: string,
  alphabetSize: number,
  word: readonly number[],
): CalibrationSource {
  const bits: number[] = [];
  do bits.push(wordConditionalBits(word, bits.length));
  while (bits[bits.length - 1] > 0);
  return {
    name,
    description,
    alphabetSize,
    order: bits.length - 1,
    rate: { low: 0, high: 0 },
    uniform: false,
    stationary: true,
    conditionalBits: (k) => bits[k] ?? 0,
    draw(length, seed) {
      const start = new SeededGenerator(seed).integer(0, word.length - 1);
      const symbols = newSymbolArray(alphabetSize, length);
      for (let i = 0; i < length; i++) symbols[i] = word[(start + i) % word.length];
      return symbols;
    },
    informationBits: (symbols) => {
      let starts = 0;
      for (let start = 0; start < word.length; start++) {
        let at = 0;
        while (at < symbols.length && symbols[at] === word[(start + at) % word.length]) at++;
        if (at === symbols.length) starts++;
      }
      return Math.log2(word.length / starts);
    },
  };
}

function wordConditionalBits(word: readonly number[], k: number): number {
  const next = new Map<string, Map<number, number>>();
  for (let start = 0; start < word.length; start++) {
    const context = Array.from({ length: k }, (_, i) => word[(start + i) % word.length]).join(' ');
    const row = next.get(context) ?? new Map<number, number>();
    next.set(context, row);
    const symbol = word[(start + k) % word.length];
    row.set(symbol, (row.get(symbol) ?? 0) + 1);
  }
  let bits = 0;
  for (const row of next.values()) {
    let total = 0;
    for (const count of row.values()) total += count;
    for (const count of row.values()) bits += (total / word.length) * entropyTerm(count / total);
  }
  return bits;
}

const withoutRate = {
  order: undefined,
  rate: undefined,
  uniform: false,
  stationary: false,
  conditionalBits: () => undefined,
  informationBits: () => undefined,
} as const;

/** Two sources, the second from the middle on. */
export function switchingSource(
  name: string,
  description: string,
  before: CalibrationSource,
  after: CalibrationSource,
): CalibrationSource {
  return {
    ...withoutRate,
    name,
    description,
    alphabetSize: before.alphabetSize,
    draw(length, seed) {
      const middle = length >>> 1;
      const symbols = newSymbolArray(before.alphabetSize, length);
      symbols.set(before.draw(middle, `${seed} before`));
      symbols.set(after.draw(length - middle, `${seed} after`), middle);
      return symbols;
    },
  };
}

/** Independent bits whose share of ones moves in a straight line from one value to another. */
export function driftingSource(
  name: string,
  description: string,
  from: number,
  to: number,
): CalibrationSource {
  return {
    ...withoutRate,
    name,
    description,
    alphabetSize: 2,
    draw(length, seed): SymbolArray {
      const generator = new SeededGenerator(seed);
      const symbols = new Uint8Array(length);
      for (let i = 0; i < length; i++) {
        const share = from + ((to - from) * i) / length;
        symbols[i] = generator.real() < share ? 1 : 0;
      }
      return symbols;
    },
  };
}
