import { BitWriter } from '../bits/bit-writer.ts';
import { BugError } from '../errors/errors.ts';
import { CodeLengthFitter } from '../stages/code-lengths.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import { NgramCutter, NgramIndex, ngramSpace } from './block-huffman-ngrams.ts';
import type { Setup, Tables, Trainer } from './contract.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { HuffmanFit } from './huffman-tables.ts';
import { MessagePieces } from './message-pieces.ts';

/**
 * What `block-huffman` learns: how often each n-gram occurs, and each symbol of a message's last,
 * shorter block.
 */
export interface BlockTables extends Tables {
  readonly coder: 'block-huffman';
  readonly n: number;
  /** Keys of the n-grams seen, rising. */
  readonly keys: Float64Array;
  /** Their raw counts. */
  readonly counts: Float64Array;
  /** Shape [m]: raw counts of tail symbols. */
  readonly tailCounts: Float64Array;
}

/**
 * The tables of a setup. Throws BugError when they are missing or were made for another n or
 * alphabet.
 */
export function blockTables(setup: Setup, n: number): BlockTables {
  const tables = setup.tables as BlockTables | undefined;
  if (
    tables?.coder !== 'block-huffman' ||
    tables.n !== n ||
    tables.tailCounts.length !== setup.alphabetSize
  ) {
    throw new BugError('block-huffman was given no tables, or tables of another coder or block', {
      coder: 'block-huffman',
      expected: `tables of block-huffman:n=${n} for ${setup.alphabetSize} symbols`,
      got: tables === undefined ? 'none' : `tables of ${tables.coder}`,
    });
  }
  return tables;
}

/** Counts n-grams and tails. */
export function blockTrainer(setup: Setup, n: number): Trainer {
  const index = new NgramIndex(ngramSpace(setup.alphabetSize, n));
  const tails = new SymbolCounts(setup.alphabetSize);
  const cutter = new NgramCutter(n, setup.alphabetSize, (keys, count) => {
    for (let i = 0; i < count; i++) index.add(keys[i]);
  });
  const pieces = new MessagePieces({
    begin: () => {},
    take: (symbols, from, to) => cutter.take(symbols, from, to),
    end: () => {
      tails.add(cutter.tail, 0, cutter.tailCount);
      cutter.tailCount = 0;
    },
  });
  return {
    push: (chunk) => pieces.push(chunk),
    finish: (): BlockTables => {
      cutter.flush();
      const keys = index.keys.slice(0, index.size).sort();
      const counts = keys.map((key) => index.counts[index.find(key)]);
      return { coder: 'block-huffman', n, keys, counts, tailCounts: tails.counts };
    },
  };
}

/**
 * Weight of the escape beside the counts of a shipped table: as much as all n-grams seen once, and
 * at least 1. None when every possible n-gram was seen: then there is nothing to escape to.
 */
export function escapeWeight(tables: BlockTables): number {
  if (tables.keys.length === ngramSpace(tables.tailCounts.length, tables.n)) return 0;
  let seenOnce = 0;
  for (let i = 0; i < tables.counts.length; i++) if (tables.counts[i] === 1) seenOnce++;
  return Math.max(1, seenOnce);
}

/** The tail's table under `shipped` gives each symbol count + 1/2. */
export const TAIL_ADDED = { p: 1, q: 2 };

/** Both codes of `block-huffman`, fitted again and again in the same buffers. */
export class BlockFit {
  /** n-grams by key; an escape, where there is one, is the last word and has no key. */
  readonly blocks = new PrefixTable();
  readonly tail: HuffmanFit;
  /** The escape's number, one past the last n-gram's; −1 without escape. */
  escape = -1;
  readonly #fitter = new CodeLengthFitter();
  readonly #maxBits: number;
  #weights = new Float64Array(64);

  constructor(maxBits: number) {
    this.#maxBits = maxBits;
    this.tail = new HuffmanFit(maxBits);
  }

  /** From the counts of a train split or a unit. */
  fitTables(tables: BlockTables, policy: 'shipped' | 'sent'): void {
    const count = tables.keys.length;
    this.#reserve(count + 1);
    this.blocks.symbols.set(tables.keys);
    this.#weights.set(tables.counts);
    const escapeCount = policy === 'shipped' ? escapeWeight(tables) : 0;
    this.escape = escapeCount > 0 ? count : -1;
    if (escapeCount > 0) this.#weights[count] = escapeCount;
    this.#fitBlocks(escapeCount > 0 ? count + 1 : count);
    if (policy === 'shipped') this.tail.fitSmoothed(tables.tailCounts, TAIL_ADDED);
    else this.tail.fitPresent(tables.tailCounts);
  }

  /** From what one message holds. */
  fitMessage(index: NgramIndex, tails: SymbolCounts): void {
    const { size } = index;
    this.#reserve(size);
    const keys = this.blocks.symbols;
    for (let i = 0; i < size; i++) keys[i] = index.keys[i];
    keys.subarray(0, size).sort();
    for (let i = 0; i < size; i++) this.#weights[i] = index.counts[index.find(keys[i])];
    this.escape = -1;
    this.#fitBlocks(size);
    this.tail.fitSeen(tails);
  }

  #fitBlocks(count: number): void {
    this.blocks.count = count;
    this.#fitter.fit(this.#weights, count, this.#maxBits, this.blocks.lengths);
  }

  #reserve(count: number): void {
    this.blocks.reserve(count);
    if (this.#weights.length < this.blocks.symbols.length)
      this.#weights = new Float64Array(this.blocks.symbols.length);
  }
}

/**
 * Lines for a person: how many n-grams, how long their words, what the tables cost where they are
 * sent.
 */
export function describeBlocks(
  tables: BlockTables,
  setup: Setup,
  fit: BlockFit,
  maxBits: number,
): string[] {
  const { blocks, tail } = fit;
  const { n, keys, counts } = tables;
  const space = ngramSpace(setup.alphabetSize, n);
  const total = counts.reduce((sum, count) => sum + count, 0);
  const seenOnce = counts.reduce((sum, count) => sum + (count === 1 ? 1 : 0), 0);
  const lines = [
    `${keys.length} of ${space} blocks of ${n} symbols seen in ${total} counted, ${seenOnce} of them once`,
  ];
  if (blocks.count > 0) {
    let shortest = 255;
    let longest = 0;
    for (let i = 0; i < blocks.count; i++) {
      shortest = Math.min(shortest, blocks.lengths[i]);
      longest = Math.max(longest, blocks.lengths[i]);
    }
    lines.push(
      `${blocks.count} code words of ${shortest} to ${longest} bits, at most ${maxBits} allowed`,
    );
  }
  if (fit.escape >= 0) {
    lines.push(
      `any other block by an escape of ${blocks.lengths[fit.escape]} bits, then symbol by symbol`,
    );
  }
  if (setup.policy === 'sent') {
    const writer = new BitWriter();
    const blockBits = blocks.count === 0 ? 0 : blocks.write(writer, space, maxBits);
    const tailBits =
      tail.table.count === 0 ? 0 : tail.table.write(writer, setup.alphabetSize, maxBits);
    lines.push(`sent in ${blockBits} bits for blocks and ${tailBits} bits for last symbols`);
  }
  return lines;
}
