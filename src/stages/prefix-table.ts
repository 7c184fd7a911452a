import type { BitReader } from '../bits/bit-reader.ts';
import type { BitWriter } from '../bits/bit-writer.ts';
import { readCount, writeCount } from '../bits/elias-delta.ts';
import { CorruptStreamError, PromiseError } from '../errors/errors.ts';
import { LengthTally } from './prefix-code.ts';
import {
  readGaps,
  readSubset,
  readWithin,
  writeGaps,
  writeSubset,
  writeWithin,
} from './prefix-subset.ts';

/**
 * The table of a complete prefix code as it is sent: which of `range` symbols have words, and how
 * long.
 *
 * 1. k − 1 as a count (Elias delta), k symbols present; where k is all of the range, no more about
 *    which.
 * 2. One bit: 0 for the set as `interpolative`, 1 as `gaps` (prefix-subset.ts), whichever is
 *    shorter.
 * 3. For k ≥ 2, how many words each length has, from 1 bit up. What Kraft's equality and `maxBits`
 *    leave possible is often one number, written in no bits; the last length is always implied. So
 *    no table that can be read is incomplete.
 * 4. For each length from the longest down, which of the symbols still without a length have it, as
 *    an interpolative set; the shortest is what remains.
 */
export class PrefixTable {
  /** Symbols with words, rising; the first {@link count} entries count. */
  symbols = new Float64Array(32);
  /** Their word lengths, in bits; 0 for a lone symbol. */
  lengths = new Uint8Array(32);
  count = 0;
  #rest = new Uint32Array(32);
  #picked = new Uint32Array(32);
  readonly #tally = new LengthTally();

  /** Room for `count` symbols; what the arrays hold is lost when they grow. */
  reserve(count: number): void {
    if (count <= this.symbols.length) return;
    const capacity = Math.max(count, 2 * this.symbols.length);
    this.symbols = new Float64Array(capacity);
    this.lengths = new Uint8Array(capacity);
    this.#rest = new Uint32Array(capacity);
    this.#picked = new Uint32Array(capacity);
  }

  /**
   * Writes the table.
   * @param range    symbols lie in 0 … range − 1
   * @param maxBits  longest word that the code may have, known to the reader
   * @returns bits written
   */
  write(writer: BitWriter, range: number, maxBits: number): number {
    const { symbols, count } = this;
    const tally = this.#tally;
    tally.take(this.lengths, count);
    if (count === 0 || !tally.complete) {
      throw new PromiseError('only the table of a complete prefix code can be written', {
        got: `${count} words`,
      });
    }
    let bits = writeCount(writer, count - 1);
    if (count < range) {
      const byGaps =
        writeGaps(undefined, symbols, count) < writeSubset(undefined, symbols, 0, count, 0, range);
      writer.writeBits(byGaps ? 1 : 0, 1);
      bits += 1;
      bits += byGaps
        ? writeGaps(writer, symbols, count)
        : writeSubset(writer, symbols, 0, count, 0, range);
    }
    if (count === 1) return bits;
    const room = new LengthRoom(count, maxBits);
    while (room.left > 0) {
      const words = tally.counts[room.length];
      bits += writeWithin(writer, words - room.least, room.most - room.least + 1);
      room.take(words);
    }
    return bits + this.#writeLengths(writer, room.length - 1);
  }

  #writeLengths(writer: BitWriter, longest: number): number {
    const { lengths } = this;
    const { counts } = this.#tally;
    const rest = this.#rest;
    const picked = this.#picked;
    let bits = 0;
    let left = this.count;
    for (let i = 0; i < left; i++) rest[i] = i;
    for (let length = longest; counts[length] < left; length--) {
      let kept = 0;
      let found = 0;
      for (let i = 0; i < left; i++) {
        if (lengths[rest[i]] === length) picked[found++] = i;
        else rest[kept++] = rest[i];
      }
      bits += writeSubset(writer, picked, 0, found, 0, left);
      left = kept;
    }
    return bits;
  }

  /**
   * Reads what {@link write} wrote.
   * @param mostSymbols  more symbols than this cannot be present (each one present is coded at
   *   least once)
   * @throws CorruptStreamError
   */
  read(reader: BitReader, range: number, maxBits: number, mostSymbols: number): void {
    const start = reader.position;
    const count = readCount(reader) + 1;
    const most = Math.min(range, mostSymbols, 2 ** maxBits);
    if (count > most) {
      throw new CorruptStreamError('a table names more symbols than there can be', {
        bitOffset: start,
        expected: `at most ${most}`,
        got: String(count),
      });
    }
    this.reserve(count);
    this.count = count;
    if (count < range && reader.readBits(1) === 1) readGaps(reader, this.symbols, count, range);
    else readSubset(reader, this.symbols, 0, count, 0, range);
    if (count === 1) {
      this.lengths[0] = 0;
      return;
    }
    const room = new LengthRoom(count, maxBits);
    const { counts } = this.#tally;
    while (room.left > 0) {
      const words = room.least + readWithin(reader, room.most - room.least + 1);
      counts[room.length] = words;
      room.take(words);
    }
    this.#readLengths(reader, room.length - 1);
  }

  #readLengths(reader: BitReader, longest: number): void {
    const { lengths } = this;
    const { counts } = this.#tally;
    const rest = this.#rest;
    const picked = this.#picked;
    let left = this.count;
    for (let i = 0; i < left; i++) rest[i] = i;
    let length = longest;
    for (; counts[length] < left; length--) {
      const wanted = counts[length];
      readSubset(reader, picked, 0, wanted, 0, left);
      let kept = 0;
      let found = 0;
      for (let i = 0; i < left; i++) {
        if (found < wanted && picked[found] === i) {
          lengths[rest[i]] = length;
          found++;
        } else {
          rest[kept++] = rest[i];
        }
      }
      left = kept;
    }
    for (let i = 0; i < left; i++) lengths[rest[i]] = length;
  }
}

/**
 * How many words of each length a complete code of k words can still have, length by length.
 *
 * Invariant, with N nodes at the present length and `left` words yet to place there or deeper: N ≤
 * left ≤ N · 2^(maxBits − length). x of the nodes go on as inner nodes, the other N − x are words;
 * each inner node holds 2 to 2^(maxBits − length) words.
 */
class LengthRoom {
  length = 1;
  left: number;
  /** Fewest and most words of the present length. */
  least = 0;
  most = 0;
  #nodes = 2;
  readonly #maxBits: number;

  constructor(count: number, maxBits: number) {
    this.left = count;
    this.#maxBits = maxBits;
    this.#bound();
  }

  /** Sets the number of words of the present length, and goes to the next. */
  take(words: number): void {
    this.left -= words;
    this.#nodes = 2 * (this.#nodes - words);
    this.length++;
    this.#bound();
  }

  #bound(): void {
    const deeper = this.left - this.#nodes;
    const fewestInner =
      deeper === 0 ? 0 : Math.ceil(deeper / (2 ** (this.#maxBits - this.length) - 1));
    this.least = this.#nodes - Math.min(this.#nodes, deeper);
    this.most = this.#nodes - fewestInner;
  }
}
