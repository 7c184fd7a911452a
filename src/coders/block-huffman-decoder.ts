import { BitReader } from '../bits/bit-reader.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import { PrefixDecoder } from '../stages/prefix-decoder.ts';
import { PrefixTable } from '../stages/prefix-table.ts';
import { newSymbolArray, type SymbolArray } from '../symbols/sequence.ts';
import { expandKeys, MOST_NGRAMS, ngramSpace } from './block-huffman-ngrams.ts';
import type { BlockFit } from './block-huffman-tables.ts';
import type { DecodeLimits, Decoder, Setup } from './contract.ts';
import { symbolWidth } from './fixed.ts';
import { MessageWalk } from './message-frame.ts';
import { growSymbols } from './symbol-buffer.ts';

/** n-grams decoded between two copies of their symbols. */
const BATCH = 4096;

/** The words of one fit, ready to read. */
export class BlockReader {
  readonly tail: PrefixDecoder;
  readonly #blocks = new PrefixDecoder(MOST_NGRAMS + 1);
  readonly #n: number;
  readonly #alphabetSize: number;
  readonly #symbolBits: number;
  readonly #entries = new Uint32Array(BATCH);
  #escape = -1;
  #ids = new Uint32Array(0);
  /** n symbols an n-gram. */
  #symbols: SymbolArray;

  constructor(n: number, alphabetSize: number) {
    this.#n = n;
    this.#alphabetSize = alphabetSize;
    this.#symbolBits = symbolWidth(alphabetSize);
    this.#symbols = newSymbolArray(alphabetSize, 0);
    this.tail = new PrefixDecoder(alphabetSize);
  }

  get shortestBlockBits(): number {
    return this.#blocks.shortestWordBits;
  }

  /**
   * Takes the table of the n-grams; `escapeEntry` is the number of the escape's word, −1 for none.
   */
  setBlocks(table: PrefixTable, escapeEntry: number, expectedBlocks: number): void {
    const { count } = table;
    if (count > this.#ids.length)
      this.#ids = Uint32Array.from({ length: Math.max(64, 2 * count) }, (_, i) => i);
    this.#blocks.setWords(this.#ids, table.lengths, count, expectedBlocks);
    this.#escape = escapeEntry;
    const ngrams = escapeEntry < 0 ? count : escapeEntry;
    this.#symbols = growSymbols(this.#symbols, this.#alphabetSize, 0, ngrams * this.#n);
    expandKeys(table.symbols, ngrams, this.#n, this.#alphabetSize, this.#symbols);
  }

  /** Decodes `count` n-grams into `out` from `from` on and returns the index past them. */
  readBlocks(reader: BitReader, out: SymbolArray, from: number, count: number): number {
    const n = this.#n;
    const entries = this.#entries;
    const symbols = this.#symbols;
    let at = from;
    let left = count;
    while (left > 0) {
      const got = this.#blocks.decode(reader, entries, 0, Math.min(BATCH, left), this.#escape);
      left -= got;
      const escaped = entries[got - 1] === this.#escape;
      const whole = escaped ? got - 1 : got;
      for (let i = 0; i < whole; i++) {
        let source = entries[i] * n;
        for (const end = at + n; at < end; at++) out[at] = symbols[source++];
      }
      if (escaped) at = this.#readRaw(reader, out, at);
    }
    return at;
  }

  #readRaw(reader: BitReader, out: SymbolArray, from: number): number {
    for (let i = from; i < from + this.#n; i++) {
      const symbol = reader.readBits(this.#symbolBits);
      if (symbol >= this.#alphabetSize) {
        throw new CorruptStreamError('an escaped symbol is outside the alphabet', {
          bitOffset: reader.position - this.#symbolBits,
          expected: `below ${this.#alphabetSize}`,
          got: String(symbol),
        });
      }
      out[i] = symbol;
    }
    return from + this.#n;
  }
}

/** The words of shipped tables. */
export function shippedBlockReader(fit: BlockFit, n: number, alphabetSize: number): BlockReader {
  const words = new BlockReader(n, alphabetSize);
  words.setBlocks(fit.blocks, fit.escape, Number.POSITIVE_INFINITY);
  const { table } = fit.tail;
  words.tail.setWords(table.symbols, table.lengths, table.count, Number.POSITIVE_INFINITY);
  return words;
}

/** A decoder of `words`; under `sent` (without them) the tables come with the messages. */
export function blockDecoder(
  setup: Setup,
  limits: DecodeLimits,
  n: number,
  maxBits: number,
  shipped: BlockReader | undefined,
): Decoder {
  const { alphabetSize } = setup;
  const words = shipped ?? new BlockReader(n, alphabetSize);
  const table = new PrefixTable();
  const each = setup.reset === 'message';
  return {
    decode(input) {
      const reader = new BitReader(input.bytes);
      const walk = new MessageWalk(reader, setup, input, limits);
      let blocksKnown = shipped !== undefined;
      let tailKnown = shipped !== undefined;
      let symbols = newSymbolArray(alphabetSize, 0);
      let filled = 0;
      for (let count = walk.next(); count >= 0; count = walk.next()) {
        const blockCount = Math.floor(count / n);
        const tailCount = count % n;
        if (blockCount > 0 && !blocksKnown) {
          // Each n-gram that a table names is coded at least once.
          const most = each ? blockCount : Math.floor(limits.maxSymbols / n);
          table.read(reader, ngramSpace(alphabetSize, n), maxBits, Math.min(most, MOST_NGRAMS));
          words.setBlocks(table, -1, most);
          blocksKnown = !each;
        }
        if (tailCount > 0 && !tailKnown) {
          const most = each ? tailCount : limits.maxSymbols;
          table.read(reader, alphabetSize, maxBits, most);
          words.tail.setWords(table.symbols, table.lengths, table.count, most);
          tailKnown = !each;
        }
        const leastBits =
          (blockCount > 0 ? blockCount * words.shortestBlockBits : 0) +
          (tailCount > 0 ? tailCount * words.tail.shortestWordBits : 0);
        if (leastBits > reader.limit - reader.position) {
          throw new CorruptStreamError('a message says it holds more symbols than its bits can', {
            bitOffset: reader.position,
            got: `${count} symbols in at least ${leastBits} bits`,
          });
        }
        symbols = growSymbols(symbols, alphabetSize, filled, count);
        filled = words.readBlocks(reader, symbols, filled, blockCount);
        if (tailCount > 0) filled = words.tail.decode(reader, symbols, filled, filled + tailCount);
        walk.close(reader.position);
      }
      return {
        sequence: {
          alphabetSize,
          symbols: symbols.subarray(0, filled),
          messageEnds: walk.messageEnds,
        },
        bitsConsumed: reader.position,
      };
    },
  };
}
