import { BugError } from '../errors/errors.ts';
import { newSymbolArray, type SymbolArray, type SymbolChunk } from '../symbols/sequence.ts';

/** What a coder does with each piece of a message; called in order, never for an empty inner piece. */
export interface PieceSink {
  /** A message of `symbolCount` symbols begins. */
  begin(symbolCount: number): void;
  /** `symbols[from … to − 1]` are its next symbols. */
  take(symbols: SymbolArray, from: number, to: number): void;
  /** It is complete. */
  end(): void;
  /** The chunk ends and the message is not complete: what was taken may be overwritten. */
  pause?(): void;
  /**
   * Codes whole messages, as many as it likes, from message `index` on, which begins at `symbols[from]`.
   * @returns index of the first message that it leaves
   */
  many?(symbols: SymbolArray, messageEnds: Uint32Array, index: number, from: number): number;
}

/**
 * Cuts chunks into pieces of messages, so that a coder deals with messages only: a chunk may hold many, or part of one.
 */
export class MessagePieces {
  readonly #sink: PieceSink;
  #open = false;
  #symbolCount = 0;
  #taken = 0;

  constructor(sink: PieceSink) {
    this.#sink = sink;
  }

  push(chunk: SymbolChunk): void {
    const { symbols, messageEnds } = chunk;
    const sink = this.#sink;
    let from = 0;
    for (let i = 0; i < messageEnds.length; i++) {
      if (!this.#open && sink.many !== undefined) {
        const next = sink.many(symbols, messageEnds, i, from);
        if (next > i) from = messageEnds[next - 1];
        i = next;
        if (i === messageEnds.length) break;
      }
      const to = messageEnds[i];
      if (!this.#open) sink.begin(to - from);
      else if (this.#taken + to - from !== this.#symbolCount) this.#refuse(this.#taken + to - from);
      if (to > from) sink.take(symbols, from, to);
      sink.end();
      this.#open = false;
      from = to;
    }
    if (from === symbols.length && chunk.openSymbolCount === undefined) return;
    if (chunk.openSymbolCount === undefined) {
      throw new BugError('a chunk ends within a message and does not say how long that message is');
    }
    if (!this.#open) {
      this.#open = true;
      this.#symbolCount = chunk.openSymbolCount;
      this.#taken = 0;
      sink.begin(chunk.openSymbolCount);
    }
    if (symbols.length > from) sink.take(symbols, from, symbols.length);
    this.#taken += symbols.length - from;
    if (this.#taken > this.#symbolCount || chunk.openSymbolCount !== this.#symbolCount)
      this.#refuse(this.#taken);
    sink.pause?.();
  }

  /** Throws when a message is still open. */
  finish(): void {
    if (this.#open) throw new BugError('the last message was not ended');
  }

  #refuse(got: number): never {
    throw new BugError('an open message has another length than it said', {
      expected: `${this.#symbolCount} symbols`,
      got: `${got} symbols`,
    });
  }
}

/** Calls `code` with each whole message; copies only messages that lie across chunks. */
export function wholeMessages(
  code: (symbols: SymbolArray, from: number, to: number) => void,
): MessagePieces {
  let expected = 0;
  let gathered: SymbolArray | undefined;
  let filled = 0;
  let lastSymbols: SymbolArray = new Uint8Array(0);
  let lastFrom = 0;
  let lastTo = 0;
  const gather = (symbols: SymbolArray, from: number, to: number): void => {
    gathered ??= newSymbolArray(
      symbols.BYTES_PER_ELEMENT === 1 ? 256 : symbols.BYTES_PER_ELEMENT === 2 ? 65536 : 2 ** 32,
      expected,
    );
    gathered.set(symbols.subarray(from, to), filled);
    filled += to - from;
  };
  return new MessagePieces({
    begin(symbolCount) {
      expected = symbolCount;
      gathered = undefined;
      filled = 0;
      lastFrom = 0;
      lastTo = 0;
    },
    take(symbols, from, to) {
      if (filled === 0 && to - from === expected) {
        lastSymbols = symbols;
        lastFrom = from;
        lastTo = to;
        return;
      }
      gather(symbols, from, to);
    },
    pause() {
      if (gathered === undefined && lastTo > lastFrom) gather(lastSymbols, lastFrom, lastTo);
    },
    end() {
      if (gathered !== undefined) code(gathered, 0, filled);
      else code(lastSymbols, lastFrom, lastTo);
    },
  });
}
