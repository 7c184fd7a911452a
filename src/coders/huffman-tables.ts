import { BitWriter } from '../bits/bit-writer.ts';
import { BugError, InputError } from '../errors/errors.ts';
import { ABSENT, CodeLengthFitter } from '../stages/code-lengths.ts';
import { canonicalCodes } from '../stages/prefix-code.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import type { Setup, Tables, Trainer } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { parseRational, type Rational } from './parameters.ts';

/** What `huffman` learns: how often each symbol occurs. The words follow from it. */
export interface HuffmanTables extends Tables {
  readonly coder: 'huffman';
  /** Shape [m], raw counts. */
  readonly counts: Float64Array;
}

/**
 * The tables of a setup, as tables of `huffman`. Throws BugError when they are missing or not of
 * this alphabet.
 */
export function huffmanTables(setup: Setup): HuffmanTables {
  const tables = setup.tables as HuffmanTables | undefined;
  if (tables?.coder !== 'huffman' || tables.counts.length !== setup.alphabetSize) {
    throw new BugError('huffman was given no tables, or tables of another coder or alphabet', {
      coder: 'huffman',
      expected: `tables of huffman for ${setup.alphabetSize} symbols`,
      got: tables === undefined ? 'none' : `tables of ${tables.coder}`,
    });
  }
  return tables;
}

/** Counts the symbols of the train split, or of a unit that `sent` tables are fitted to. */
export function huffmanTrainer(setup: Setup): Trainer {
  const counts = new SymbolCounts(setup.alphabetSize);
  return {
    push: (chunk) => counts.add(chunk.symbols, 0, chunk.symbols.length),
    finish: (): HuffmanTables => ({ coder: 'huffman', counts: counts.counts }),
  };
}

/** The rational X of a word `add:X`. */
export function addedCount(word: string): Rational {
  const added = parseRational(word.slice(word.indexOf(':') + 1));
  if (added === undefined) throw new BugError(`not a value of unseen: ${word}`);
  return added;
}

/**
 * Fits prefix codes to counts, again and again in the same buffers; the fit lies in {@link table}.
 */
export class HuffmanFit {
  readonly table = new PrefixTable();
  readonly #fitter = new CodeLengthFitter();
  readonly #maxBits: number;
  #weights = new Float64Array(32);

  constructor(maxBits: number) {
    this.#maxBits = maxBits;
  }

  /**
   * Words for the symbols that occur, by how often they do. Brings `counts.seen` into rising order.
   */
  fitSeen(counts: SymbolCounts): void {
    counts.sort();
    const count = counts.seenCount;
    this.#reserve(count);
    for (let i = 0; i < count; i++) {
      this.table.symbols[i] = counts.seen[i];
      this.#weights[i] = counts.counts[counts.seen[i]];
    }
    this.#fit(count);
  }

  /** As {@link fitSeen}, from counts by symbol. */
  fitPresent(counts: Float64Array): void {
    this.#reserve(counts.length);
    let count = 0;
    for (let symbol = 0; symbol < counts.length; symbol++) {
      if (counts[symbol] === 0) continue;
      this.table.symbols[count] = symbol;
      this.#weights[count++] = counts[symbol];
    }
    this.#fit(count);
  }

  /** Words for all symbols, by count + p/q; in integers, count · q + p. */
  fitSmoothed(counts: Float64Array, added: Rational): void {
    this.#reserve(counts.length);
    for (let symbol = 0; symbol < counts.length; symbol++) {
      this.table.symbols[symbol] = symbol;
      const weight = counts[symbol] * added.q + added.p;
      if (!Number.isSafeInteger(weight)) {
        throw new InputError(
          'the counts of the train split times the denominator of unseen=add:X pass 2^53',
          {
            coder: 'huffman',
            symbolIndex: symbol,
            advice: 'Take an X with a smaller denominator.',
          },
        );
      }
      this.#weights[symbol] = weight;
    }
    this.#fit(counts.length);
  }

  #fit(count: number): void {
    this.table.count = count;
    this.#fitter.fit(this.#weights, count, this.#maxBits, this.table.lengths);
  }

  #reserve(count: number): void {
    this.table.reserve(count);
    if (this.#weights.length < count) this.#weights = new Float64Array(this.table.symbols.length);
  }
}

/** Rows of a screen that shows the most frequent symbols with their words. */
const ROWS = 8;

/**
 * Lines for a person: how many words, how long, what the table costs where it is sent, and the
 * shortest few.
 */
export function describeHuffman(
  tables: HuffmanTables,
  setup: Setup,
  fit: HuffmanFit,
  maxBits: number,
): string[] {
  const { table } = fit;
  const { counts } = tables;
  const lengths = new Uint8Array(setup.alphabetSize).fill(ABSENT);
  let shortest = ABSENT;
  let longest = 0;
  for (let i = 0; i < table.count; i++) {
    lengths[table.symbols[i]] = table.lengths[i];
    shortest = Math.min(shortest, table.lengths[i]);
    longest = Math.max(longest, table.lengths[i]);
  }
  const total = counts.reduce((sum, count) => sum + count, 0);
  const seen = counts.reduce((sum, count) => sum + (count > 0 ? 1 : 0), 0);
  const lines = [`${seen} of ${setup.alphabetSize} symbols seen in ${total} counted`];
  if (table.count === 0) return lines;
  lines.push(
    `${table.count} code words of ${shortest} to ${longest} bits, at most ${maxBits} allowed`,
  );
  if (setup.policy === 'sent') {
    const bits = table.write(new BitWriter(), setup.alphabetSize, maxBits);
    lines.push(`sent in ${bits} bits`);
  }
  const codes = canonicalCodes(lengths);
  const bySize = Array.from({ length: table.count }, (_, i) => table.symbols[i]).sort(
    (a, b) => lengths[a] - lengths[b] || a - b,
  );
  for (const symbol of bySize.slice(0, ROWS)) {
    const word =
      lengths[symbol] === 0 ? '(empty)' : codes[symbol].toString(2).padStart(lengths[symbol], '0');
    lines.push(`symbol ${symbol}: ${counts[symbol]} times, word ${word}`);
  }
  if (table.count > ROWS) lines.push(`… and ${table.count - ROWS} more`);
  return lines;
}
