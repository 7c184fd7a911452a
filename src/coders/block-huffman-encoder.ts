import { BitWriter } from '../bits/bit-writer.ts';
import { PromiseError } from '../errors/errors.ts';
import { PrefixEncoder } from '../stages/prefix-encoder.ts';
import { expandKeys, NgramCutter, NgramIndex, ngramSpace } from './block-huffman-ngrams.ts';
import { BlockFit, type BlockTables } from './block-huffman-tables.ts';
import type { Encoder, Setup } from './contract.ts';
import { symbolWidth } from './fixed.ts';
import { SymbolCounts } from './huffman-counts.ts';
import { writeSymbolCount } from './message-frame.ts';
import { MessageLedger } from './message-ledger.ts';
import { MessagePieces, wholeMessages } from './message-pieces.ts';

/** n-grams coded between two calls of the kernel. */
const BATCH = 4096;

/** The words of one fit, ready to write: n-grams by key, tails by symbol. */
export class BlockWords {
  readonly #n: number;
  readonly #alphabetSize: number;
  readonly #symbolBits: number;
  readonly #index: NgramIndex;
  readonly #blocks: PrefixEncoder;
  readonly #tail: PrefixEncoder;
  readonly #escape: number;
  readonly #entries = new Uint32Array(BATCH);
  readonly #key = new Float64Array(1);
  readonly #symbols: Uint32Array;

  constructor(fit: BlockFit, n: number, alphabetSize: number) {
    this.#n = n;
    this.#alphabetSize = alphabetSize;
    this.#symbolBits = symbolWidth(alphabetSize);
    this.#symbols = new Uint32Array(n);
    this.#escape = fit.escape;
    const { blocks, tail } = fit;
    this.#index = new NgramIndex(ngramSpace(alphabetSize, n));
    const ngrams = fit.escape < 0 ? blocks.count : fit.escape;
    for (let i = 0; i < ngrams; i++) this.#index.add(blocks.symbols[i]);
    this.#blocks = new PrefixEncoder(blocks.count);
    this.#blocks.setWords(
      Uint32Array.from({ length: blocks.count }, (_, i) => i),
      blocks.lengths,
      blocks.count,
    );
    this.#tail = new PrefixEncoder(alphabetSize);
    this.#tail.setWords(tail.table.symbols, tail.table.lengths, tail.table.count);
  }

  /** Writes the words of `count` n-grams and returns the number of bits. */
  writeBlocks(writer: BitWriter, keys: Float64Array, count: number): number {
    const entries = this.#entries;
    let bits = 0;
    let filled = 0;
    for (let i = 0; i < count; i++) {
      const entry = this.#index.find(keys[i]);
      if (entry >= 0) {
        entries[filled++] = entry;
        if (filled < BATCH) continue;
      } else {
        if (this.#escape < 0) {
          throw new PromiseError('a block to code is not in the table and there is no escape', {
            coder: 'block-huffman',
            advice: 'The tables were fitted to other symbols than the ones coded.',
          });
        }
        // The batch is handed over whenever it is full, so there is room for the escape.
        entries[filled++] = this.#escape;
      }
      bits += this.#blocks.encode(writer, entries, 0, filled);
      filled = 0;
      if (entry < 0) bits += this.#writeRaw(writer, keys[i]);
    }
    return bits + this.#blocks.encode(writer, entries, 0, filled);
  }

  #writeRaw(writer: BitWriter, key: number): number {
    this.#key[0] = key;
    expandKeys(this.#key, 1, this.#n, this.#alphabetSize, this.#symbols);
    for (let j = 0; j < this.#n; j++) writer.writeBits(this.#symbols[j], this.#symbolBits);
    return this.#n * this.#symbolBits;
  }

  /** Bits that {@link writeTail} would write. */
  tailBits(symbols: Uint32Array, count: number): number {
    return this.#tail.bitsOf(symbols, 0, count);
  }

  /** Writes the words of a message's last symbols and returns the number of bits. */
  writeTail(writer: BitWriter, symbols: Uint32Array, count: number): number {
    return count === 0 ? 0 : this.#tail.encode(writer, symbols, 0, count);
  }
}

/**
 * One pair of tables for the whole unit; under `sent` each is written in the first message that
 * needs it.
 */
export function unitEncoder(
  setup: Setup,
  n: number,
  words: BlockWords,
  unsent: BlockFit | undefined,
  maxBits: number,
): Encoder {
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  let blocksUnsent = unsent !== undefined;
  let tailUnsent = unsent !== undefined;
  const cutter = new NgramCutter(n, setup.alphabetSize, (keys, count) => {
    book(ledger, words.writeBlocks(writer, keys, count));
  });
  const pieces = new MessagePieces({
    begin(symbolCount) {
      ledger.framingBits += writeSymbolCount(writer, setup, symbolCount);
      if (blocksUnsent && symbolCount >= n) {
        ledger.tableBits += unsent!.blocks.write(
          writer,
          ngramSpace(setup.alphabetSize, n),
          maxBits,
        );
        blocksUnsent = false;
      }
      if (tailUnsent && symbolCount % n > 0) {
        ledger.tableBits += unsent!.tail.table.write(writer, setup.alphabetSize, maxBits);
        tailUnsent = false;
      }
    },
    take: (symbols, from, to) => cutter.take(symbols, from, to),
    end() {
      cutter.flush();
      book(ledger, words.writeTail(writer, cutter.tail, cutter.tailCount));
      cutter.tailCount = 0;
      ledger.close(writer);
    },
  });
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      return ledger.finish(writer);
    },
  };
}

/** Fits tables to each message and sends there those that it needs. */
export function messageEncoder(setup: Setup, n: number, maxBits: number): Encoder {
  const { alphabetSize } = setup;
  const writer = new BitWriter();
  const ledger = new MessageLedger(setup.align);
  const fit = new BlockFit(maxBits);
  const index = new NgramIndex(ngramSpace(alphabetSize, n));
  const tails = new SymbolCounts(alphabetSize);
  const tailWords = new PrefixEncoder(alphabetSize);
  let blockWords = new PrefixEncoder(256);
  // The entries of the message's n-grams in order, so that each is looked up once.
  let entries = new Uint32Array(256);
  let entryCount = 0;
  let ids = new Uint32Array(256);
  const cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
    if (entryCount + count > entries.length) {
      const grown = new Uint32Array(Math.max(2 * entries.length, entryCount + count));
      grown.set(entries);
      entries = grown;
    }
    for (let i = 0; i < count; i++) entries[entryCount++] = index.add(keys[i]);
  });

  const pieces = wholeMessages((symbols, from, to) => {
    ledger.framingBits += writeSymbolCount(writer, setup, to - from);
    index.clear();
    tails.clear();
    entryCount = 0;
    cutter.take(symbols, from, to);
    cutter.flush();
    tails.add(cutter.tail, 0, cutter.tailCount);
    fit.fitMessage(index, tails);
    const { blocks, tail } = fit;
    if (entryCount > 0)
      ledger.tableBits += blocks.write(writer, ngramSpace(alphabetSize, n), maxBits);
    if (cutter.tailCount > 0) ledger.tableBits += tail.table.write(writer, alphabetSize, maxBits);
    if (entryCount > 0) {
      if (index.size > ids.length) {
        ids = new Uint32Array(2 * index.size);
        blockWords = new PrefixEncoder(2 * index.size);
      }
      for (let i = 0; i < index.size; i++) ids[i] = index.find(blocks.symbols[i]);
      blockWords.setWords(ids, blocks.lengths, index.size);
      book(ledger, blockWords.encode(writer, entries, 0, entryCount));
    }
    if (cutter.tailCount > 0) {
      tailWords.setWords(tail.table.symbols, tail.table.lengths, tail.table.count);
      book(ledger, tailWords.encode(writer, cutter.tail, 0, cutter.tailCount));
    }
    cutter.tailCount = 0;
    ledger.close(writer);
  });
  return {
    push: (chunk) => pieces.push(chunk),
    finish: () => {
      pieces.finish();
      return ledger.finish(writer);
    },
  };
}

function book(ledger: MessageLedger, bits: number): void {
  ledger.writtenBits += bits;
  ledger.payloadBits += bits;
}

/** Fits both codes to tables. */
export function fitBlocks(tables: BlockTables, setup: Setup, maxBits: number): BlockFit {
  const fit = new BlockFit(maxBits);
  fit.fitTables(tables, setup.policy === 'shipped' ? 'shipped' : 'sent');
  return fit;
}
