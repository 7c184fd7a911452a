import seedrandom from 'seedrandom';
import { InputError } from '../errors/errors.ts';
import { firstAbove, type RawCorpus } from './corpus.ts';

/** How train and test are told apart. */
export interface SplitRule {
  /** Under fill, messages here are units; `unit` is another word for that. */
  readonly by: 'message' | 'unit' | 'file' | 'block';
  readonly order: 'in_time' | 'random';
  /** Share of the messages, files or symbols that go to train, 0 … 1, to nine decimals. */
  readonly train: number;
  /** Of the generator, under `random`; absent: 1. */
  readonly seed?: number;
  /** Present: instead of one split there are so many, as folds.ts parts them, and `train` says nothing. */
  readonly folds?: number;
}

/**
 * One side of a split: pieces of the corpus in its order. Under `message` and `file` a piece is a whole message; under
 * `block` it may be a part of one.
 */
export interface SplitSide {
  /** First symbol of each piece, in the corpus. */
  readonly starts: Uint32Array;
  /** One past its last symbol. */
  readonly ends: Uint32Array;
  /** The message of the corpus that each piece belongs to. */
  readonly messageIndexes: Uint32Array;
  /** For each file of the corpus the index one past its last piece; equal neighbours are files without a piece. */
  readonly fileEnds: Uint32Array;
}

/** A decided split: every symbol of the corpus, and every message, lies on exactly one side. */
export interface Split {
  readonly rule: SplitRule;
  readonly train: SplitSide;
  readonly test: SplitSide;
}

/** What a split needs to know about a corpus. */
export type SplitShape = Pick<RawCorpus, 'name' | 'messageEnds' | 'fileEnds' | 'fill'>;

/** Blocks that a random split by block is dealt from. */
const BLOCKS = 64;

/** ⌊share × count⌋, the share read as a decimal number of nine places, so that 0.29 of 100 is 29. */
export function floorShare(share: number, count: number): number {
  return Number((BigInt(Math.round(share * 1e9)) * BigInt(count)) / 1_000_000_000n);
}

/**
 * Things of `count` that go to train.
 * @throws InputError when a side would stay empty
 */
function trainCountOf(rule: SplitRule, count: number, thing: string, corpus: string): number {
  const trainCount = floorShare(rule.train, count);
  if (trainCount >= 1 && trainCount < count) return trainCount;
  const lonely = count === 1;
  throw new InputError(
    `the corpus ${corpus} cannot be split by ${rule.by}: ${trainCount < 1 ? 'train' : 'test'} would be empty`,
    {
      key: 'split',
      expected: `at least one ${thing} on each side`,
      got: `train: ${rule.train} of ${count} ${thing}${lonely ? '' : 's'}`,
      advice:
        rule.by !== 'block' && lonely
          ? 'Use by: block, which cuts the symbols themselves, or name more data.'
          : 'Use another share for train, or name more data.',
    },
  );
}

/**
 * For each of `count` things 1 when it goes to train, 0 when to test. `in_time`: the first ones are train. `random`: a
 * seeded draw without replacement (Fisher–Yates; Knuth, TAOCP 2, 3rd edition, algorithm 3.4.2P).
 */
function dealSides(rule: SplitRule, count: number, thing: string, corpus: string): Uint8Array {
  const trainCount = trainCountOf(rule, count, thing, corpus);
  const sides = new Uint8Array(count);
  if (rule.order === 'in_time') return sides.fill(1, 0, trainCount);
  const next = seedrandom(String(rule.seed ?? 1));
  const order = Uint32Array.from({ length: count }, (_, i) => i);
  for (let i = 0; i < trainCount; i++) {
    const j = i + Math.floor(next() * (count - i));
    const chosen = order[j];
    order[j] = order[i];
    order[i] = chosen;
    sides[chosen] = 1;
  }
  return sides;
}

/** Collects the pieces of one side. */
class SideBuilder {
  readonly #starts: Uint32Array;
  readonly #ends: Uint32Array;
  readonly #messages: Uint32Array;
  #count = 0;

  /** @param capacity  most pieces that will be added */
  constructor(capacity: number) {
    this.#starts = new Uint32Array(capacity);
    this.#ends = new Uint32Array(capacity);
    this.#messages = new Uint32Array(capacity);
  }

  add(start: number, end: number, message: number): void {
    this.#starts[this.#count] = start;
    this.#ends[this.#count] = end;
    this.#messages[this.#count++] = message;
  }

  /** @param fileEnds  of the corpus, in its messages */
  finish(fileEnds: Uint32Array): SplitSide {
    const messageIndexes = this.#messages.slice(0, this.#count);
    return {
      starts: this.#starts.slice(0, this.#count),
      ends: this.#ends.slice(0, this.#count),
      messageIndexes,
      fileEnds: fileEnds.map((end) => firstAbove(messageIndexes, end - 1)),
    };
  }
}

/**
 * Decides which messages, or parts of messages, are train and which test.
 *
 * - by `message` or `unit`: whole messages; by `file`: all messages of a file together.
 * - by `block`, `in_time`: one cut after ⌊train · n⌋ symbols; the message across it becomes two.
 * - by `block`, `random`: 64 blocks of equal size (to one symbol; fewer than 64 symbols give blocks of one) are dealt;
 *   a message is cut only where its neighbours lie on different sides. An empty message goes with the block it stands in.
 *   Under fill, cuts move up to the end of a unit.
 * @throws InputError when a side would stay empty
 */
export function decideSplit(shape: SplitShape, rule: SplitRule): Split {
  // Each cut between blocks makes at most one piece more.
  const capacity = shape.messageEnds.length + BLOCKS;
  const train = new SideBuilder(capacity);
  const test = new SideBuilder(capacity);
  if (rule.by === 'block') cutBlocks(shape, rule, train, test);
  else {
    const { messageEnds, fileEnds } = shape;
    const byFile = rule.by === 'file';
    const count = byFile ? fileEnds.length : messageEnds.length;
    const thing = shape.fill !== undefined && !byFile ? 'unit' : rule.by;
    const sides = dealSides(rule, count, thing, shape.name);
    let file = 0;
    let start = 0;
    for (let message = 0; message < messageEnds.length; message++) {
      while (fileEnds[file] <= message) file++;
      const side = sides[byFile ? file : message] === 1 ? train : test;
      side.add(start, messageEnds[message], message);
      start = messageEnds[message];
    }
  }
  const split = { rule, train: train.finish(shape.fileEnds), test: test.finish(shape.fileEnds) };
  for (const side of ['train', 'test'] as const) {
    const { starts, ends } = split[side];
    if (starts.some((start, i) => start < ends[i])) continue;
    throw new InputError(`the corpus ${shape.name} cannot be split: ${side} holds no symbols`, {
      key: 'split',
      expected: 'at least one symbol on each side',
      advice: 'Use another share for train, or another order.',
    });
  }
  return split;
}

function cutBlocks(
  shape: SplitShape,
  rule: SplitRule,
  train: SideBuilder,
  test: SideBuilder,
): void {
  const { messageEnds } = shape;
  const symbolCount = messageEnds[messageEnds.length - 1] ?? 0;
  let cuts: Uint32Array;
  let sides: Uint8Array;
  if (rule.order === 'in_time') {
    const trainCount = trainCountOf(rule, symbolCount, 'symbol', shape.name);
    cuts = Uint32Array.of(trainCount, symbolCount);
    sides = Uint8Array.of(1, 0);
  } else {
    const blocks = Math.min(BLOCKS, symbolCount);
    cuts = Uint32Array.from({ length: blocks }, (_, i) =>
      Math.floor(((i + 1) * symbolCount) / blocks),
    );
    sides = dealSides(rule, blocks, 'block', shape.name);
  }
  // A unit is never cut: it goes with the block that it begins in.
  if (shape.fill !== undefined)
    cuts = cuts.map((cut) => (cut === 0 ? 0 : messageEnds[firstAbove(messageEnds, cut - 1)]));
  const last = cuts.length - 1;
  let block = 0;
  let start = 0;
  for (let message = 0; message < messageEnds.length; message++) {
    const end = messageEnds[message];
    while (block < last && cuts[block] <= start) block++;
    let from = start;
    // The piece grows over a block's end while the next block lies on the same side.
    while (block < last && cuts[block] < end) {
      if (sides[block] !== sides[block + 1]) {
        (sides[block] === 1 ? train : test).add(from, cuts[block], message);
        from = cuts[block];
      }
      block++;
    }
    (sides[block] === 1 ? train : test).add(from, end, message);
    start = end;
  }
}
