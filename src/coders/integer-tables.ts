import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import { BugError, CorruptStreamError } from '../errors/errors.ts';
import type { Setup, Tables, Trainer } from './contract.ts';
import { symbolWidth } from './fixed.ts';
import { SymbolCounts } from './huffman-counts.ts';
import type { IntegerFamily } from './integer-family.ts';

/** What an integer coder learns from a train split, or from a unit that `sent` tables are fitted to. */
export interface IntegerTables extends Tables {
  readonly alphabetSize: number;
  /** The best parameter, by exact cost. */
  readonly parameter: number;
  /** Length of the symbols under it, in bits. */
  readonly bits: number;
  /** Sum and number of the symbols: their mean. */
  readonly sum: number;
  readonly count: number;
}

/** The tables of a setup. Throws BugError when they are missing, or of another coder or alphabet. */
export function integerTables(family: IntegerFamily, setup: Setup): IntegerTables {
  const tables = setup.tables as IntegerTables | undefined;
  if (tables?.coder !== family.name || tables.alphabetSize !== setup.alphabetSize) {
    throw new BugError(
      `${family.name} was given no tables, or tables of another coder or alphabet`,
      {
        coder: family.name,
        expected: `tables of ${family.name} for ${setup.alphabetSize} symbols`,
        got: tables === undefined ? 'none' : `tables of ${tables.coder}`,
      },
    );
  }
  return tables;
}

/** Counts symbols, and chooses the parameter in the end. */
export function integerTrainer(family: IntegerFamily, setup: Setup): Trainer {
  const { alphabetSize } = setup;
  const counts = new SymbolCounts(alphabetSize);
  return {
    push: (chunk) => counts.add(chunk.symbols, 0, chunk.symbols.length),
    finish(): IntegerTables {
      const { parameter, bits } = family.chooser().choose(counts);
      let sum = 0;
      for (let i = 0; i < counts.seenCount; i++)
        sum += counts.seen[i] * counts.counts[counts.seen[i]];
      return { coder: family.name, alphabetSize, parameter, bits, sum, count: counts.total };
    },
  };
}

/** Bits of a parameter that is sent: enough to number those that can be the best for the alphabet. */
export function parameterBits(family: IntegerFamily, alphabetSize: number): number {
  return symbolWidth(family.greatestUseful(alphabetSize) - family.least + 1);
}

/** Writes the parameter and returns the bits it takes, to be booked in `tables`. */
export function writeParameter(
  writer: BitWriter,
  family: IntegerFamily,
  alphabetSize: number,
  parameter: number,
): number {
  const width = parameterBits(family, alphabetSize);
  writer.writeBits(parameter - family.least, width);
  return width;
}

/** Reads what {@link writeParameter} wrote. Throws CorruptStreamError for a parameter that is never sent. */
export function readParameter(
  reader: BitReader,
  family: IntegerFamily,
  alphabetSize: number,
): number {
  const greatest = family.greatestUseful(alphabetSize);
  const parameter = family.least + reader.readBits(parameterBits(family, alphabetSize));
  if (parameter > greatest) {
    throw new CorruptStreamError(`a message gives a value of ${family.key} that is never sent`, {
      bitOffset: reader.position,
      expected: `at most ${greatest}`,
      got: String(parameter),
    });
  }
  return parameter;
}
