import type { SymbolArray, SymbolChunk } from '../symbols/sequence.ts';
import type { PiecesPrice, Pricer } from './in-pieces.ts';

/** Prices one message after another. */
export interface MessagePricer {
  begin(): void;
  add(symbols: SymbolArray, from: number, to: number): void;
  /** Ideal bits of the message. */
  takeBits(): number;
}

/** Hands the pieces of messages to a pricer and keeps what each message costs; chunks need not say how long an open one is. */
export class PricedMessages implements Pricer {
  readonly #fitOrder: number | undefined;
  readonly #pricer: MessagePricer;
  #messageIdealBits = new Float64Array(16);
  #count = 0;
  #idealBits = 0;
  #isOpen = false;

  constructor(fitOrder: number | undefined, pricer: MessagePricer) {
    this.#fitOrder = fitOrder;
    this.#pricer = pricer;
  }

  push({ symbols, messageEnds }: SymbolChunk): void {
    let from = 0;
    for (const to of messageEnds) {
      this.#add(symbols, from, to);
      this.#end();
      from = to;
    }
    if (from < symbols.length) this.#add(symbols, from, symbols.length);
  }

  finish(): PiecesPrice {
    return {
      idealBits: this.#idealBits,
      messageIdealBits: this.#messageIdealBits.slice(0, this.#count),
      ...(this.#fitOrder === undefined ? {} : { fitOrder: this.#fitOrder }),
    };
  }

  #add(symbols: SymbolArray, from: number, to: number): void {
    if (!this.#isOpen) {
      this.#isOpen = true;
      this.#pricer.begin();
    }
    this.#pricer.add(symbols, from, to);
  }

  #end(): void {
    this.#isOpen = false;
    const bits = this.#pricer.takeBits();
    this.#idealBits += bits;
    if (this.#count === this.#messageIdealBits.length) {
      const grown = new Float64Array(2 * this.#count);
      grown.set(this.#messageIdealBits);
      this.#messageIdealBits = grown;
    }
    this.#messageIdealBits[this.#count++] = bits;
  }
}
