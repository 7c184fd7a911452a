import type { SymbolArray } from '../symbols/sequence.ts';
import { SymbolHistory } from './symbol-history.ts';
import { type SymbolKernel, symbolwise } from './symbolwise.ts';
import type { Transform } from './transform.ts';

/**
 * `lagN`: each symbol less the one N back, modulo m; where N back lies before the start, less 0. With N the symbols of a
 * record it is the difference to the same place in the record before.
 * @param lag  N, 1 or more
 */
export function lagTransform(lag: number): Transform {
  return symbolwise({
    name: `lag${lag}`,
    forward: (alphabetSize) => new LagDifference(alphabetSize, lag),
    inverse: (alphabetSize) => new LagSum(alphabetSize, lag),
  });
}

class LagDifference implements SymbolKernel {
  readonly #alphabetSize: number;
  readonly #history: SymbolHistory;

  constructor(alphabetSize: number, lag: number) {
    this.#alphabetSize = alphabetSize;
    this.#history = new SymbolHistory(lag);
  }

  restart(): void {
    this.#history.restart();
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    const history = this.#history;
    const { ring } = history;
    const lag = ring.length;
    let { slot } = history;
    // Up to here nothing stands so far back in the message.
    const known = Math.min(to, from + lag - history.seen);
    for (let i = from; i < known; i++) {
      const symbol = source[i];
      target[i] = symbol;
      ring[slot] = symbol;
      if (++slot === lag) slot = 0;
    }
    for (let i = known; i < to; i++) {
      const symbol = source[i];
      const difference = symbol - ring[slot];
      target[i] = difference < 0 ? difference + alphabetSize : difference;
      ring[slot] = symbol;
      if (++slot === lag) slot = 0;
    }
    history.slot = slot;
    history.seen = Math.min(lag, history.seen + to - from);
  }
}

class LagSum implements SymbolKernel {
  readonly #alphabetSize: number;
  readonly #history: SymbolHistory;

  constructor(alphabetSize: number, lag: number) {
    this.#alphabetSize = alphabetSize;
    this.#history = new SymbolHistory(lag);
  }

  restart(): void {
    this.#history.restart();
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    const history = this.#history;
    const { ring } = history;
    const lag = ring.length;
    let { slot } = history;
    // Up to here nothing stands so far back in the message.
    const known = Math.min(to, from + lag - history.seen);
    for (let i = from; i < known; i++) {
      const symbol = source[i];
      target[i] = symbol;
      ring[slot] = symbol;
      if (++slot === lag) slot = 0;
    }
    for (let i = known; i < to; i++) {
      let symbol = source[i] + ring[slot];
      if (symbol >= alphabetSize) symbol -= alphabetSize;
      target[i] = symbol;
      ring[slot] = symbol;
      if (++slot === lag) slot = 0;
    }
    history.slot = slot;
    history.seen = Math.min(lag, history.seen + to - from);
  }
}
