import type { DecodedTaker } from '../coders/in-pieces.ts';
import { CorruptStreamError } from '../errors/errors.ts';
import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';

/** Compares what a decoder gives with what was coded, as both come; {@link finish} says whether it was all. */
export class StreamComparison implements DecodedTaker {
  readonly #chunks: Generator<SymbolChunk, void, undefined>;
  readonly #symbolCounts: Uint32Array;
  #symbols: SymbolArray = new Uint8Array(0);
  /** Next symbol of the chunk, and of the unit. */
  #at = 0;
  #total = 0;
  #message = 0;
  #messageEnd = 0;

  /** @param symbolCounts  of each message that was coded */
  constructor(chunks: Generator<SymbolChunk, void, undefined>, symbolCounts: Uint32Array) {
    this.#chunks = chunks;
    this.#symbolCounts = symbolCounts;
  }

  take(symbols: SymbolArray, from: number, to: number): void {
    for (let i = from; i < to; ) {
      if (this.#at === this.#symbols.length && !this.#next()) this.#refuseNumber();
      const stop = Math.min(to, i + this.#symbols.length - this.#at);
      const own = this.#symbols;
      let at = this.#at;
      for (; i < stop; i++, at++) {
        if (symbols[i] !== own[at]) {
          throw new CorruptStreamError('the decoder gave back another symbol', {
            symbolIndex: this.#total + at - this.#at,
            expected: String(own[at]),
            got: String(symbols[i]),
          });
        }
      }
      this.#total += at - this.#at;
      this.#at = at;
    }
  }

  end(): void {
    this.#messageEnd += this.#symbolCounts[this.#message] ?? 0;
    if (this.#total !== this.#messageEnd) {
      throw new CorruptStreamError('the decoder gave back another end of a message', {
        messageIndex: this.#message,
        expected: String(this.#messageEnd),
        got: String(this.#total),
      });
    }
    this.#message++;
  }

  /**
   * @param bitsConsumed  what the decoder says it read
   * @param carriedBits   what there was
   * @throws CorruptStreamError when not all was given back, or not all bits were read
   */
  finish(bitsConsumed: number, carriedBits: number): void {
    while (this.#at === this.#symbols.length) if (!this.#next()) break;
    if (this.#at < this.#symbols.length || this.#message !== this.#symbolCounts.length)
      this.#refuseNumber();
    if (bitsConsumed !== carriedBits) {
      throw new CorruptStreamError('the decoder did not read exactly the carried bits', {
        expected: `${carriedBits} bits`,
        got: `${bitsConsumed} bits`,
      });
    }
  }

  #next(): boolean {
    const step = this.#chunks.next();
    if (step.done === true) return false;
    this.#symbols = step.value.symbols;
    this.#at = 0;
    return true;
  }

  #refuseNumber(): never {
    throw new CorruptStreamError('the decoder gave back another number of symbols or messages', {
      expected: `${this.#symbolCounts.length} messages`,
      got: `${this.#total} symbols or more in ${this.#message} messages`,
    });
  }
}
