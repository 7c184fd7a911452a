import type { BitWriter } from '../bits/bit-writer.ts';
import type { SymbolArray } from '../symbols/sequence.ts';
import type { BlockWords } from './block-huffman-encoder.ts';
import { NgramCutter } from './block-huffman-ngrams.ts';
import type { Encoder, Setup } from './contract.ts';
import { type DraftTail, type DraftWords, WordDraft } from './fill-drafts.ts';
import { fillingEncoder } from './fill-messages.ts';

/** An encoder that fills messages with the words of shipped tables. */
export function blockFiller(setup: Setup, n: number, words: BlockWords): Encoder {
  return fillingEncoder(setup, new WordDraft(setup, new DraftBlocks(setup, n, words)));
}

/**
 * Blocks as they become whole, and the tail behind them. With units of whole blocks there is no tail, and no message grows
 * shorter by another unit; else a tail may be longer than the block that it becomes part of.
 */
class DraftBlocks implements DraftWords, DraftTail {
  readonly isEmptyAtUnits: boolean;
  readonly #words: BlockWords;
  readonly #cutter: NgramCutter;
  readonly #markedTail: Uint32Array;
  #markedCount = 0;
  #writer: BitWriter | undefined;

  constructor({ alphabetSize, unitSymbols }: Setup, n: number, words: BlockWords) {
    this.isEmptyAtUnits = n === 1 || (unitSymbols !== undefined && unitSymbols % n === 0);
    this.#words = words;
    this.#markedTail = new Uint32Array(n);
    this.#cutter = new NgramCutter(n, alphabetSize, (keys, count) => {
      words.writeBlocks(this.#writer!, keys, count);
    });
  }

  get tail(): DraftTail {
    return this;
  }

  encode(writer: BitWriter, symbols: SymbolArray, from: number, to: number): void {
    this.#writer = writer;
    this.#cutter.take(symbols, from, to);
    this.#cutter.flush();
  }

  restart(): void {
    this.#cutter.tailCount = 0;
  }

  bits(): number {
    const { tail, tailCount } = this.#cutter;
    return tailCount === 0 ? 0 : this.#words.tailBits(tail, tailCount);
  }

  mark(): void {
    const { tail, tailCount } = this.#cutter;
    this.#markedCount = tailCount;
    for (let i = 0; i < tailCount; i++) this.#markedTail[i] = tail[i];
  }

  restore(): void {
    this.#cutter.tailCount = this.#markedCount;
    for (let i = 0; i < this.#markedCount; i++) this.#cutter.tail[i] = this.#markedTail[i];
  }

  write(writer: BitWriter): void {
    this.#words.writeTail(writer, this.#cutter.tail, this.#cutter.tailCount);
  }
}
