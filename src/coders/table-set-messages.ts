import { BugError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolChunk, type SymbolSequence } from '../symbols/sequence.ts';
import type { Coder, Setup, Tables } from './contract.ts';
import { SymbolEnds } from './fill-units.ts';
import { MessagePieces } from './message-pieces.ts';
import { growSymbols } from './symbol-buffer.ts';

/** What a coder with several tables is given: one set of the coder inside for each selector value. */
export interface TableSet extends Tables {
  readonly sets: readonly Tables[];
}

/** The tables of a setup, as a set of `count` of this coder. Throws BugError when they are anything else. */
export function tableSetOf(setup: Setup, coder: string, count: number): readonly Tables[] {
  const { sets, coder: maker } = (setup.tables ?? {}) as Partial<TableSet>;
  if (maker !== tableSetName(coder) || sets?.length !== count) {
    throw new BugError('a coder with several tables was given none, or those of another', {
      coder,
      expected: `${count} tables`,
      got: `${sets?.length ?? 'none'} of ${maker ?? 'no coder'}`,
    });
  }
  return sets;
}

/** Who makes the tables, so that no other coder takes them for its own. */
export const tableSetName = (coder: string): string => `${coder} with tables_in_set`;

/** Gathers chunks into one sequence of whole messages. */
export class MessageStore {
  readonly #alphabetSize: number;
  readonly #ends = new SymbolEnds();
  readonly #pieces: MessagePieces;
  #symbols: SymbolSequence['symbols'];
  #count = 0;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
    this.#symbols = newSymbolArray(alphabetSize, 0);
    this.#pieces = new MessagePieces({
      begin: () => {},
      take: (symbols, from, to) => {
        this.#symbols = growSymbols(this.#symbols, alphabetSize, this.#count, to - from);
        this.#symbols.set(symbols.subarray(from, to), this.#count);
        this.#count += to - from;
      },
      end: () => this.#ends.add(this.#count),
    });
  }

  push(chunk: SymbolChunk): void {
    this.#pieces.push(chunk);
  }

  /** An open message is an error. */
  finish(): SymbolSequence {
    this.#pieces.finish();
    return {
      alphabetSize: this.#alphabetSize,
      symbols: this.#symbols.subarray(0, this.#count),
      messageEnds: this.#ends.finish(),
    };
  }
}

/** Where message `index` begins. */
export const startOfMessage = ({ messageEnds }: SymbolSequence, index: number): number =>
  index === 0 ? 0 : messageEnds[index - 1];

/** The messages for which `takes` is true, copied, in their order. */
export function messagesWhere(
  sequence: SymbolSequence,
  takes: (index: number) => boolean,
): SymbolSequence {
  const { alphabetSize, messageEnds } = sequence;
  const symbols = newSymbolArray(alphabetSize, sequence.symbols.length);
  const ends = new SymbolEnds();
  let count = 0;
  for (let i = 0; i < messageEnds.length; i++) {
    if (!takes(i)) continue;
    const from = startOfMessage(sequence, i);
    symbols.set(sequence.symbols.subarray(from, messageEnds[i]), count);
    count += messageEnds[i] - from;
    ends.add(count);
  }
  return { alphabetSize, symbols: symbols.subarray(0, count), messageEnds: ends.finish() };
}

/** Coded bits of each message, nothing padded. `setup` has tables of the coder itself, and align 1. */
export function bitsOfMessages(coder: Coder, setup: Setup, sequence: SymbolSequence): Float64Array {
  const encoder = coder.encoder(setup);
  encoder.push(sequence);
  const { messageEndsBits } = encoder.finish();
  return messageEndsBits.map((end, i) => end - (i === 0 ? 0 : messageEndsBits[i - 1]));
}

/** For each message the table that gives it the fewest bits, of equals the first; and those bits. */
export class TableChoice {
  readonly owners: Uint8Array;
  readonly leastBits: Float64Array;
  #tableCount = 0;

  constructor(messageCount: number) {
    this.owners = new Uint8Array(messageCount);
    this.leastBits = new Float64Array(messageCount).fill(Number.POSITIVE_INFINITY);
  }

  /** Takes note of what the next table gives. */
  add(bits: Float64Array): void {
    const { owners, leastBits } = this;
    for (let i = 0; i < bits.length; i++) {
      if (bits[i] >= leastBits[i]) continue;
      leastBits[i] = bits[i];
      owners[i] = this.#tableCount;
    }
    this.#tableCount++;
  }

  get totalBits(): number {
    return this.leastBits.reduce((sum, bits) => sum + bits, 0);
  }
}

/** The choice of each message among `sets`. `setup` has align 1. */
export function chooseTables(
  coder: Coder,
  setup: Setup,
  sets: readonly Tables[],
  sequence: SymbolSequence,
): TableChoice {
  const choice = new TableChoice(sequence.messageEnds.length);
  for (const tables of sets) choice.add(bitsOfMessages(coder, { ...setup, tables }, sequence));
  return choice;
}

/** Number of each message's table; nothing is coded to tell where there is but one. `setup` has align 1. */
export function ownersOf(
  coder: Coder,
  setup: Setup,
  sets: readonly Tables[],
  sequence: SymbolSequence,
): Uint8Array {
  if (sets.length === 1) return new Uint8Array(sequence.messageEnds.length);
  return chooseTables(coder, setup, sets, sequence).owners;
}
