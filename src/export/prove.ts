import type { Candidate } from '../coders/candidate.ts';
import type { Setup } from '../coders/contract.ts';
import { SeededGenerator } from '../statistics/generator.ts';
import type { SymbolArray, SymbolSequence } from '../symbols/sequence.ts';
import { type CodedMessage, codedMessages, messageDecoder } from './coded-messages.ts';

/** What an exported coder answers; `status` 0 is done. */
export interface Answer {
  readonly status: number;
  readonly elements: ArrayLike<number>;
  readonly usedBytes: number;
}

/** One thing to do, and all that an exported coder needs to know of it. */
export type Task =
  | { readonly kind: 'encode'; readonly symbols: SymbolArray }
  | { readonly kind: 'decode'; readonly bytes: Uint8Array; readonly capacity: number };

/** Runs an exported coder on tasks, in order. */
export type TaskRunner = (tasks: readonly Task[]) => Answer[];

/** What was compared, all of it equal. */
export interface Proof {
  /** Messages coded and decoded byte-identical. */
  readonly messages: number;
  readonly symbols: number;
  readonly bytes: number;
  /** Damaged messages on which both decoders gave the same symbols or both refused. */
  readonly damaged: number;
  /** How many of these were refused. */
  readonly refused: number;
}

/** Thrown when an exported coder does not do what the program itself does. */
export class ParityError extends Error {}

function same(a: ArrayLike<number>, b: ArrayLike<number>): boolean {
  if (a.length !== b.length) return false;
  for (let i = 0; i < a.length; i++) if (a[i] !== b[i]) return false;
  return true;
}

const hex = (bytes: ArrayLike<number>): string =>
  Array.from({ length: Math.min(bytes.length, 32) }, (_, i) =>
    bytes[i].toString(16).padStart(2, '0'),
  ).join(' ');

/** Cuts, flips and random bytes: what comes in over a bad link, or from somebody who means harm. */
function damagedBytes(coded: readonly CodedMessage[], count: number, seed: number): Uint8Array[] {
  const random = new SeededGenerator(seed);
  const filled = coded.filter(({ bytes }) => bytes.length > 0);
  if (filled.length === 0) return [];
  return Array.from({ length: count }, (_, i) => {
    const { bytes } = filled[random.integer(0, filled.length - 1)];
    if (i % 3 === 0) return bytes.slice(0, random.integer(0, bytes.length - 1));
    const damaged = bytes.slice();
    if (i % 3 === 1) {
      const bit = random.integer(0, damaged.length * 8 - 1);
      damaged[bit >> 3] ^= 0x80 >> (bit & 7);
      return damaged;
    }
    return damaged.map(() => random.integer(0, 255));
  });
}

/** What the program's own coder makes of messages and of damaged bytes: found once, held against every export. */
export interface Expectation {
  readonly messages: readonly CodedMessage[];
  readonly damaged: readonly DamagedMessage[];
}

interface DamagedMessage {
  readonly bytes: Uint8Array;
  /** Symbols that its decoder has room for, or is told to give. */
  readonly capacity: number;
  /** Undefined where the bytes are refused. */
  readonly symbols: SymbolArray | undefined;
}

/** Room that a decoder of damaged bytes is given, in symbols. */
const DAMAGED_CAPACITY = 4096;

/** @param sequences  train, test, adversarial messages */
export function expectation(
  candidate: Candidate,
  setup: Setup,
  sequences: readonly SymbolSequence[],
  damagedCount: number,
): Expectation {
  const coder = candidate.create();
  const messages = sequences.flatMap((sequence) => codedMessages(coder, setup, sequence));
  const { unitSymbols = 1 } = setup;
  const capacity =
    setup.lengths === 'known'
      ? 8 * unitSymbols
      : Math.floor(DAMAGED_CAPACITY / unitSymbols) * unitSymbols;
  const decode = messageDecoder(coder, setup, capacity);
  const damaged = damagedBytes(messages, damagedCount, 1).map((bytes) => ({
    bytes,
    capacity,
    symbols: decode(bytes),
  }));
  return { messages, damaged };
}

/**
 * Holds an exported coder to the program's own: messages byte by byte, decodes symbol by symbol, damaged bytes by verdict.
 * @throws ParityError that names the first message that differs
 */
export function prove({ messages, damaged }: Expectation, run: TaskRunner): Proof {
  const encoded = run(messages.map(({ symbols }) => ({ kind: 'encode', symbols })));
  messages.forEach(({ bytes }, i) => {
    const answer = encoded[i];
    if (answer.status === 0 && same(answer.elements, bytes)) return;
    throw new ParityError(
      `message ${i} is coded otherwise: status ${answer.status}, ${hex(answer.elements)} in place of ${hex(bytes)}`,
    );
  });
  const decoded = run(
    messages.map(({ symbols, bytes }) => ({ kind: 'decode', bytes, capacity: symbols.length })),
  );
  messages.forEach(({ symbols, bytes }, i) => {
    const answer = decoded[i];
    if (answer.status === 0 && same(answer.elements, symbols) && answer.usedBytes === bytes.length)
      return;
    throw new ParityError(
      `message ${i} is decoded otherwise: status ${answer.status}, ${answer.elements.length} symbols of ${symbols.length}, ${answer.usedBytes} bytes of ${bytes.length}`,
    );
  });
  proveDamaged(damaged, run);
  return {
    messages: messages.length,
    symbols: messages.reduce((sum, { symbols }) => sum + symbols.length, 0),
    bytes: messages.reduce((sum, { bytes }) => sum + bytes.length, 0),
    damaged: damaged.length,
    refused: damaged.filter(({ symbols }) => symbols === undefined).length,
  };
}

function proveDamaged(damaged: readonly DamagedMessage[], run: TaskRunner): void {
  const answers = run(damaged.map(({ bytes, capacity }) => ({ kind: 'decode', bytes, capacity })));
  damaged.forEach(({ bytes, symbols }, i) => {
    const answer = answers[i];
    const agree =
      symbols === undefined
        ? answer.status !== 0
        : answer.status === 0 && same(answer.elements, symbols);
    if (agree) return;
    throw new ParityError(
      `damaged bytes ${hex(bytes)} (${bytes.length}) are ${symbols === undefined ? 'refused' : 'decoded'} here and ${answer.status === 0 ? 'decoded' : `refused (${answer.status})`} there`,
    );
  });
}
