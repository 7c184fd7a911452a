import { CorruptStreamError, LimitError } from '../errors/errors.ts';
import { ContextTree, NODE_SECOND, NODE_SYMBOL, NODE_WORDS, SYMBOL_MASK } from './context-tree.ts';
import type { IntervalSink, IntervalSource } from './interval.ts';
import { bitLength, IntegerModel, putBits, SmallModel, takeBits } from './small-model.ts';
import { childrenOf, suffixesOf } from './static-table.ts';

/**
 * How a table of `sent` is carried: the set of strings of 1, 2 … k + 1 symbols that occur, level by level, then how often
 * each longest one occurs.
 *
 * - Where contexts know positions, the empty string stands for as many, and a string without its oldest symbol begins one later.
 * - The symbols that follow a string are among those that follow it without its oldest symbol (the whole alphabet for the
 *   empty string). Their number is written, then which ones: while at least one candidate in 16 is wanted, one yes or no
 *   each, of exactly the odds that remain; else the number of candidates skipped.
 * - A count is written as its bit length, in the context of the length that the same symbol's count had last, and less than
 *   half of its further bits: what is cut costs a fraction of a bit in the code lengths, and saves more in the table.
 *
 * Everything goes through small adaptive models and the range coder, in a code string of its own.
 */

/** Candidates for one wanted, from which on gaps are shorter than single decisions. */
const SPARSE = 16;

/** Bits kept below the leading 1 of a count of `length` bits: swept on five files at orders 0 to 3. */
const keptBits = (length: number): number => Math.max(0, ((length - 1) >> 1) - 2);

/** The count that the decoder sees: the middle of the counts that share the bits kept. */
export function roundCount(count: number): number {
  const length = bitLength(count);
  const cut = length - 1 - keptBits(length);
  if (cut <= 0) return count;
  const unit = 2 ** cut;
  return Math.floor(count / unit) * unit + unit / 2;
}

class TableModels {
  readonly sizes = Array.from({ length: 18 }, () => new IntegerModel());
  readonly gaps = Array.from({ length: 18 }, () => new IntegerModel());
  readonly lengths = Array.from({ length: 34 }, () => new SmallModel(33));
  /** Bit length of the last count of each symbol; 0 before the first. */
  readonly lastLengths: Uint8Array;

  constructor(alphabetSize: number) {
    this.lastLengths = new Uint8Array(alphabetSize);
  }
}

/**
 * Writes the strings and counts of a tree whose strings have at most `order` + 1 symbols, at least one of them.
 * @param tree  counts in the second words
 */
export function writeSentTable(tree: ContextTree, order: number, sink: IntervalSink): void {
  const models = new TableModels(tree.alphabetSize);
  const { starts, children } = childrenOf(tree);
  const suffixes = suffixesOf(tree);
  const { words } = tree;
  const { positions } = tree;
  let level = rootsOf(tree);
  for (let length = 0; length <= order; length++) {
    const longer: number[] = [];
    if (length < order) longer.push(tree.startNode(length + 1));
    for (const node of level) {
      const isEmpty = node < positions;
      const from = isEmpty ? 0 : starts[suffixes[node]];
      const candidates = isEmpty ? tree.alphabetSize : starts[suffixes[node] + 1] - from;
      const wanted = starts[node + 1] - starts[node];
      if (candidates === 0) continue;
      models.sizes[bitLength(candidates)].encode(wanted, sink);
      let at = 0;
      for (let i = starts[node]; i < starts[node + 1]; i++) {
        const child = children[i];
        const symbol = words[child * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK;
        const needed = starts[node + 1] - i;
        let place = symbol;
        if (!isEmpty) {
          place = from + at;
          while ((words[children[place] * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK) !== symbol)
            place++;
          place -= from;
        }
        writePlace(models, sink, at, place, needed, candidates);
        at = place + 1;
        if (length < order) longer.push(child);
        else writeCount(models, sink, symbol, words[child * NODE_WORDS + NODE_SECOND]);
      }
    }
    level = longer;
  }
}

/**
 * Reads what {@link writeSentTable} wrote, as a tree whose longest strings have their rounded counts.
 * @param maxPairs  most strings of order + 1 symbols that an honest table can have
 * @throws CorruptStreamError, LimitError
 */
export function readSentTable(
  alphabetSize: number,
  order: number,
  maxPairs: number,
  source: IntervalSource,
  positions = 1,
): ContextTree {
  const models = new TableModels(alphabetSize);
  const tree = new ContextTree(alphabetSize, order + 1, positions);
  const starts: number[] = [];
  const ends: number[] = [];
  const children: number[] = [];
  let level = rootsOf(tree);
  let suffixes: number[] = level;
  for (let length = 0; length <= order; length++) {
    const longer: number[] = [];
    const longerSuffixes: number[] = [];
    if (length < order) {
      longerSuffixes.push(tree.startNode(length));
      longer.push(tree.startNode(length + 1));
    }
    let pairs = 0;
    for (let n = 0; n < level.length; n++) {
      const node = level[n];
      const suffix = suffixes[n];
      const isEmpty = node < positions;
      const from = isEmpty ? 0 : starts[suffix];
      const candidates = isEmpty ? alphabetSize : ends[suffix] - from;
      starts[node] = children.length;
      ends[node] = children.length;
      if (candidates === 0) continue;
      const wanted = models.sizes[bitLength(candidates)].decode(source);
      pairs += wanted;
      if (wanted > candidates) refuse('more symbols after a context than there are');
      if (pairs > maxPairs) {
        throw new LimitError('a sent table has more entries than its symbols can need', {
          expected: `at most ${maxPairs}`,
        });
      }
      let at = 0;
      for (let needed = wanted; needed > 0; needed--) {
        const place = readPlace(models, source, at, needed, candidates);
        at = place + 1;
        const candidate = isEmpty ? place : children[from + place];
        const symbol = isEmpty
          ? place
          : tree.words[candidate * NODE_WORDS + NODE_SYMBOL] & SYMBOL_MASK;
        const child = tree.add(node, symbol);
        children.push(child);
        let count = 1;
        if (length < order) {
          longer.push(child);
          longerSuffixes.push(isEmpty ? tree.nextRoot(node) : candidate);
        } else {
          count = readCount(models, source, symbol);
        }
        tree.words[child * NODE_WORDS + NODE_SECOND] = count;
      }
      ends[node] = children.length;
    }
    level = longer;
    suffixes = longerSuffixes;
  }
  return tree;
}

/** The empty contexts, one for each position. */
const rootsOf = (tree: ContextTree): number[] =>
  Array.from({ length: tree.positions }, (_, position) => position);

function writePlace(
  models: TableModels,
  sink: IntervalSink,
  from: number,
  place: number,
  needed: number,
  candidates: number,
): void {
  for (let at = from; ; at++) {
    const left = candidates - at;
    if (left === needed) return;
    if (left >= SPARSE * needed) {
      models.gaps[bitLength(Math.floor(left / needed))].encode(place - at, sink);
      return;
    }
    if (at === place) {
      sink.put(0, needed, left);
      return;
    }
    sink.put(needed, left - needed, left);
  }
}

function readPlace(
  models: TableModels,
  source: IntervalSource,
  from: number,
  needed: number,
  candidates: number,
): number {
  for (let at = from; ; at++) {
    const left = candidates - at;
    if (left === needed) return at;
    if (left >= SPARSE * needed) {
      const place = at + models.gaps[bitLength(Math.floor(left / needed))].decode(source);
      if (candidates - place < needed) refuse('too few symbols left after a context');
      return place;
    }
    if (source.target(left) < needed) {
      source.take(0, needed);
      return at;
    }
    source.take(needed, left - needed);
  }
}

function writeCount(models: TableModels, sink: IntervalSink, symbol: number, count: number): void {
  const length = bitLength(count);
  models.lengths[models.lastLengths[symbol]].encode(length, sink);
  models.lastLengths[symbol] = length;
  const kept = keptBits(length);
  const cut = length - 1 - kept;
  putBits(sink, Math.floor(count / 2 ** cut) - 2 ** kept, kept);
}

function readCount(models: TableModels, source: IntervalSource, symbol: number): number {
  const length = models.lengths[models.lastLengths[symbol]].decode(source);
  if (length === 0) refuse('a count of zero');
  models.lastLengths[symbol] = length;
  const kept = keptBits(length);
  const cut = length - 1 - kept;
  const bits = takeBits(source, kept);
  return (2 ** kept + bits) * 2 ** cut + (cut > 0 ? 2 ** (cut - 1) : 0);
}

function refuse(what: string): never {
  throw new CorruptStreamError(`a sent table says ${what}`, {
    advice: 'The bytes were cut or altered, or belong to another coder.',
  });
}
