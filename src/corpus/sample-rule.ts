import { InputError } from '../errors/errors.ts';
import { nearestWord } from '../errors/nearest.ts';
import { SeededGenerator } from '../statistics/generator.ts';
import { byteSizeText, parseByteSize } from './byte-size.ts';

/**
 * Which blocks of the files of a corpus are read. Each file is cut into blocks of `blockBytes`, the last one shorter; blocks
 * are numbered through all files in order.
 * - `every`: the first of each `every` blocks.
 * - `reservoir`: ⌊bytes ÷ blockBytes⌋ blocks, at least one, drawn without replacement.
 */
export type SampleRule =
  | { readonly kind: 'every'; readonly every: number; readonly blockBytes: number }
  | {
      readonly kind: 'reservoir';
      readonly bytes: number;
      readonly blockBytes: number;
      readonly seed: number;
    };

/** What was taken of how much. */
export interface SampleFacts {
  readonly rule: SampleRule;
  /** Blocks taken, and of how many. */
  readonly blocks: number;
  readonly ofBlocks: number;
  /** Bytes of the messages that were taken, with what parts them; and of all files. */
  readonly bytes: number;
  readonly ofBytes: number;
}

const USUAL_BLOCK_BYTES = 1_000_000;
const LEAST_BLOCK_BYTES = 256;
const LARGEST_COUNT = 2 ** 31;
const USUAL_SEED = 1;
const FORM = 'every=N,block=SIZE or reservoir=SIZE,block=SIZE,seed=N';

/** A sample as a plan writes it; sizes as text. */
export interface WrittenSample {
  readonly every?: number | undefined;
  readonly reservoir?: string | undefined;
  readonly block?: string | undefined;
  readonly seed?: number | undefined;
}

/**
 * Checks a sample.
 * @throws InputError that names the key
 */
export function sampleRule({ every, reservoir, block, seed }: WrittenSample): SampleRule {
  const blockBytes = block === undefined ? USUAL_BLOCK_BYTES : parseByteSize(block);
  if (blockBytes < LEAST_BLOCK_BYTES || blockBytes > LARGEST_COUNT) {
    throw new InputError('a block of a sample cannot have this size', {
      key: 'block',
      expected: `${LEAST_BLOCK_BYTES} to ${LARGEST_COUNT} bytes`,
      got: `${blockBytes} bytes`,
    });
  }
  if ((every === undefined) === (reservoir === undefined)) {
    throw new InputError('a sample takes every n-th block or a reservoir of so many bytes', {
      expected: 'every or reservoir, and not both',
      got: every === undefined ? 'neither' : 'both',
    });
  }
  if (every !== undefined) {
    if (seed === undefined) return { kind: 'every', every, blockBytes };
    throw new InputError('a seed changes nothing here', {
      key: 'seed',
      expected: 'reservoir beside it',
      got: 'every',
    });
  }
  const bytes = parseByteSize(reservoir!);
  if (bytes >= blockBytes)
    return { kind: 'reservoir', bytes, blockBytes, seed: seed ?? USUAL_SEED };
  throw new InputError('a reservoir holds at least one block', {
    key: 'reservoir',
    expected: `${blockBytes} bytes or more`,
    got: `${bytes} bytes`,
  });
}

/**
 * Reads a sample as an option writes it: `every=12,block=1MB`, `reservoir=64MB,block=1MB,seed=7`.
 * @throws InputError with the nearest key
 */
export function parseSampleRule(text: string): SampleRule {
  const written: { every?: number; reservoir?: string; block?: string; seed?: number } = {};
  for (const part of text.split(',')) {
    const equals = part.indexOf('=');
    const key = part.slice(0, Math.max(0, equals)).trim();
    const value = part.slice(equals + 1).trim();
    if (key in written) refuse(text, `${key} once`);
    if (key === 'every') written.every = countOf(text, key, value, 1);
    else if (key === 'seed') written.seed = countOf(text, key, value, 0);
    else if (key === 'reservoir') written.reservoir = value;
    else if (key === 'block') written.block = value;
    else refuse(text, FORM, nearestWord(key, ['every', 'reservoir', 'block', 'seed']));
  }
  return sampleRule(written);
}

function countOf(text: string, key: string, value: string, least: number): number {
  const count = /^\d{1,10}$/.test(value) ? Number(value) : -1;
  if (count < least || count > LARGEST_COUNT)
    refuse(text, `${key}= and a whole number from ${least} to ${LARGEST_COUNT}`);
  return count;
}

function refuse(text: string, expected: string, near?: string): never {
  throw new InputError(`cannot read the sample ${JSON.stringify(text)}`, {
    expected,
    got: text,
    ...(near === undefined ? {} : { advice: `Did you mean ${near}=?` }),
  });
}

/** As an option writes it. */
export function sampleRuleText(rule: SampleRule): string {
  const block = `block=${byteSizeText(rule.blockBytes)}`;
  return rule.kind === 'every'
    ? `every=${rule.every},${block}`
    : `reservoir=${byteSizeText(rule.bytes)},${block},seed=${rule.seed}`;
}

/**
 * Numbers of the blocks that are taken of `count`, rising.
 *
 * Drawn one after another, each with the share of those still wanted among those left, so that every choice of so many
 * blocks is equally likely (selection sampling; Knuth, TAOCP 2, 3rd edition, algorithm 3.4.2S).
 */
export function chosenBlocks(rule: SampleRule, count: number): number[] {
  const chosen: number[] = [];
  if (rule.kind === 'every') {
    for (let block = 0; block < count; block += rule.every) chosen.push(block);
    return chosen;
  }
  const wanted = Math.min(count, Math.floor(rule.bytes / rule.blockBytes));
  const generator = new SeededGenerator(rule.seed);
  for (let block = 0; chosen.length < wanted; block++) {
    if (generator.real() * (count - block) < wanted - chosen.length) chosen.push(block);
  }
  return chosen;
}
