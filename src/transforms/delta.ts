import type { SymbolArray } from '../symbols/sequence.ts';
import { type SymbolKernel, symbolwise } from './symbolwise.ts';

/** `delta`: each symbol less the one before, modulo m; before the first stands 0. */
export const delta = symbolwise({
  name: 'delta',
  forward: (alphabetSize) => new Difference(alphabetSize),
  inverse: (alphabetSize) => new Sum(alphabetSize),
});

class Difference implements SymbolKernel {
  readonly #alphabetSize: number;
  #before = 0;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {
    this.#before = 0;
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    let before = this.#before;
    for (let i = from; i < to; i++) {
      const symbol = source[i];
      const difference = symbol - before;
      target[i] = difference < 0 ? difference + alphabetSize : difference;
      before = symbol;
    }
    this.#before = before;
  }
}

class Sum implements SymbolKernel {
  readonly #alphabetSize: number;
  #before = 0;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {
    this.#before = 0;
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    let before = this.#before;
    for (let i = from; i < to; i++) {
      const sum = before + source[i];
      before = sum >= alphabetSize ? sum - alphabetSize : sum;
      target[i] = before;
    }
    this.#before = before;
  }
}
