import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import type { OperationTally } from '../models/counting-tally.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { SymbolCounts } from './huffman-counts.ts';
import type { RunningMean } from './integer-mean.ts';

/** A parameter with the exact length of what it was chosen for. */
export interface ChosenParameter {
  readonly parameter: number;
  readonly bits: number;
}

/** Finds parameters, in buffers that are used again. */
export interface ParameterChooser {
  /**
   * The parameter that makes the counted symbols shortest, in exact integers. Of equals the greatest, whose longest
   * word is the shortest; so without symbols the greatest useful one.
   */
  choose(counts: SymbolCounts): ChosenParameter;
}

/**
 * A family of codes for the integers 0, 1, 2 …, one for each value of a parameter. The loops stand in each family, so that
 * none pays for the others.
 */
export interface IntegerFamily {
  /** Name of the coder. */
  readonly name: 'rice' | 'golomb' | 'exp-golomb';
  /** Key and range of the parameter. */
  readonly key: string;
  readonly least: number;
  readonly greatest: number;
  /** Greatest parameter that can be the best for an alphabet: all words from there on are as long as, or longer than, its own. */
  greatestUseful(alphabetSize: number): number;
  /** Length of the word for `symbol`, in bits. */
  wordBits(symbol: number, parameter: number): number;
  chooser(): ParameterChooser;
  /** Appends the words of `symbols[from … to − 1]`. */
  encode(
    writer: BitWriter,
    symbols: SymbolArray,
    from: number,
    to: number,
    parameter: number,
  ): void;
  /** Fills `symbols[from … to − 1]`. Throws CorruptStreamError. */
  decode(
    reader: BitReader,
    symbols: SymbolArray,
    from: number,
    to: number,
    parameter: number,
    alphabetSize: number,
  ): void;
  /** As `encode`, with the parameter that follows from the symbols before by the family's rule. */
  encodeAdaptive(
    writer: BitWriter,
    symbols: SymbolArray,
    from: number,
    to: number,
    mean: RunningMean,
  ): void;
  decodeAdaptive(
    reader: BitReader,
    symbols: SymbolArray,
    from: number,
    to: number,
    mean: RunningMean,
    alphabetSize: number,
  ): void;
  /** Adds what the word for `symbol` takes in `encode` and in `decode`. */
  countWord(
    symbol: number,
    parameter: number,
    encoder: OperationTally,
    decoder: OperationTally,
  ): void;
  /** The parameter that follows from the mean; adds what its rule takes, the same at both ends. */
  countAdapting(mean: RunningMean, tally: OperationTally): number;
}

/**
 * Weighs every parameter from `least` to the greatest useful one on every distinct symbol.
 * Cost: distinct symbols × parameters.
 */
export function chooseByTrial(
  least: number,
  greatestUseful: (alphabetSize: number) => number,
  wordBits: (symbol: number, parameter: number) => number,
): ParameterChooser {
  return {
    choose(counts) {
      const greatest = greatestUseful(counts.counts.length);
      let best = greatest;
      let bestBits = Number.POSITIVE_INFINITY;
      for (let parameter = greatest; parameter >= least; parameter--) {
        let bits = 0;
        for (let i = 0; i < counts.seenCount; i++) {
          const symbol = counts.seen[i];
          bits += counts.counts[symbol] * wordBits(symbol, parameter);
        }
        if (bits < bestBits) {
          best = parameter;
          bestBits = bits;
        }
      }
      return { parameter: best, bits: bestBits };
    },
  };
}
