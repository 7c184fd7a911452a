import { BugError, InputError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolArray, type SymbolChunk } from '../symbols/sequence.ts';
import { growSymbols } from './symbol-buffer.ts';

/** Symbols that are gathered before messages are made of them, unless the end comes first. */
const GATHERED_SYMBOLS = 1 << 16;

/**
 * Makes messages of the whole units there are, the first of which begins a message.
 * @param unitEnds  one past the last symbol of each, from `symbols[0]` on
 * @param last      no more units will come: all are to be taken
 * @returns units in messages that are decided
 */
export type MessageMaker = (symbols: SymbolArray, unitEnds: Uint32Array, last: boolean) => number;

/**
 * Gathers chunks into whole units for an encoder that decides messages itself, and keeps those of the message that is not
 * decided. A large chunk of whole units is handed on without a copy.
 */
export class UnitGatherer {
  /** Units and symbols of decided messages, before those that the maker is given. */
  unitsDone = 0;
  symbolsDone = 0;
  readonly #make: MessageMaker;
  #symbols: SymbolArray = new Uint8Array(0);
  #symbolCount = 0;
  #ends = new Uint32Array(64);
  #endCount = 0;
  /** Symbol count of a unit that goes on in the next chunk. */
  #openSymbols: number | undefined;
  /** Symbols from which on the maker is asked again: doubling keeps the cost of asking too early linear. */
  #askFrom = GATHERED_SYMBOLS;

  constructor(make: MessageMaker) {
    this.#make = make;
  }

  push(chunk: SymbolChunk): void {
    const { symbols, messageEnds, alphabetSize } = chunk;
    this.#checkOpen(chunk);
    if (
      this.#symbolCount === 0 &&
      this.#endCount === 0 &&
      symbols.length >= GATHERED_SYMBOLS &&
      chunk.openSymbolCount === undefined
    ) {
      const done = this.#make(symbols, messageEnds, false);
      const from = done === 0 ? 0 : messageEnds[done - 1];
      this.#book(done, from);
      this.#append(symbols, from, messageEnds, done, alphabetSize);
    } else {
      this.#append(symbols, 0, messageEnds, 0, alphabetSize);
      if (this.#symbolCount >= this.#askFrom) this.#makeMessages(false);
    }
  }

  /** Makes messages of all that is left. */
  finish(): void {
    if (this.#openSymbols !== undefined) throw new BugError('the last unit was not ended');
    if (this.#endCount > 0) this.#makeMessages(true);
  }

  #checkOpen({ symbols, messageEnds, openSymbolCount }: SymbolChunk): void {
    const lastEnd = this.#endCount === 0 ? 0 : this.#ends[this.#endCount - 1];
    const before = this.#symbolCount - lastEnd;
    const expected = this.#openSymbols;
    if (expected !== undefined && messageEnds.length > 0 && before + messageEnds[0] !== expected) {
      throw new BugError('an open unit has another length than it said', {
        expected: `${expected} symbols`,
        got: `${before + messageEnds[0]} symbols`,
      });
    }
    const closed = messageEnds.length > 0 || expected === undefined;
    const over =
      symbols.length - (messageEnds.length === 0 ? 0 : messageEnds[messageEnds.length - 1]);
    if (over > 0 && openSymbolCount === undefined) {
      throw new BugError('a chunk ends within a unit and does not say how long that unit is');
    }
    if (!closed && openSymbolCount === undefined) return;
    this.#openSymbols = openSymbolCount;
  }

  #append(
    symbols: SymbolArray,
    from: number,
    messageEnds: Uint32Array,
    firstEnd: number,
    alphabetSize: number,
  ): void {
    const more = symbols.length - from;
    const base = this.#symbolCount - from;
    if (this.#symbols.BYTES_PER_ELEMENT !== symbols.BYTES_PER_ELEMENT)
      this.#symbols = newSymbolArray(alphabetSize, 0);
    this.#symbols = growSymbols(this.#symbols, alphabetSize, this.#symbolCount, more);
    this.#symbols.set(from === 0 ? symbols : symbols.subarray(from), this.#symbolCount);
    this.#symbolCount += more;
    const endCount = this.#endCount + messageEnds.length - firstEnd;
    if (endCount > this.#ends.length) {
      const grown = new Uint32Array(Math.max(endCount, this.#ends.length * 2));
      grown.set(this.#ends.subarray(0, this.#endCount));
      this.#ends = grown;
    }
    for (let i = firstEnd; i < messageEnds.length; i++)
      this.#ends[this.#endCount++] = base + messageEnds[i];
  }

  #makeMessages(last: boolean): void {
    const done = this.#make(this.#symbols, this.#ends.subarray(0, this.#endCount), last);
    const from = done === 0 ? 0 : this.#ends[done - 1];
    this.#book(done, from);
    this.#symbols.copyWithin(0, from, this.#symbolCount);
    this.#symbolCount -= from;
    this.#endCount -= done;
    for (let i = 0; i < this.#endCount; i++) this.#ends[i] = this.#ends[done + i] - from;
    this.#askFrom = Math.max(GATHERED_SYMBOLS, 2 * this.#symbolCount);
  }

  #book(units: number, symbols: number): void {
    this.unitsDone += units;
    this.symbolsDone += symbols;
  }
}

/** Symbol ends of messages, gathered by doubling. */
export class SymbolEnds {
  #ends = new Uint32Array(64);
  #count = 0;

  add(end: number): void {
    if (this.#count === this.#ends.length) {
      const grown = new Uint32Array(this.#count * 2);
      grown.set(this.#ends);
      this.#ends = grown;
    }
    this.#ends[this.#count++] = end;
  }

  finish(): Uint32Array {
    return this.#ends.slice(0, this.#count);
  }
}

/** A unit that takes more than the whole budget. */
export function refuseUnit(unitIndex: number, bits: number, budgetBits: number): never {
  throw new InputError(`unit ${unitIndex} does not fit into a message even alone`, {
    key: 'messages',
    expected: `at most ${budgetBits / 8} bytes, the budget of fill, for every unit`,
    got: `${bits} bits (${Math.ceil(bits / 8)} bytes) for unit ${unitIndex}, counted from 0`,
    advice: 'Give fill more bytes, use smaller units, or another candidate.',
  });
}
