import type { SymbolArray } from '../symbols/sequence.ts';
import { type SymbolKernel, symbolwise } from './symbolwise.ts';

/**
 * `delta2`: each symbol less the straight line through the two before, x − 2x₁ + x₂ modulo m; before the first stand zeros.
 * The same as `delta.delta`, in one walk.
 */
export const delta2 = symbolwise({
  name: 'delta2',
  forward: (alphabetSize) => new LineResidual(alphabetSize),
  inverse: (alphabetSize) => new LineSum(alphabetSize),
});

class LineResidual implements SymbolKernel {
  readonly #alphabetSize: number;
  #before = 0;
  /** Difference of the last symbol and the one before it, 0 … m − 1. */
  #slope = 0;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {
    this.#before = 0;
    this.#slope = 0;
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    let before = this.#before;
    let slope = this.#slope;
    for (let i = from; i < to; i++) {
      const symbol = source[i];
      let difference = symbol - before;
      if (difference < 0) difference += alphabetSize;
      const residual = difference - slope;
      target[i] = residual < 0 ? residual + alphabetSize : residual;
      before = symbol;
      slope = difference;
    }
    this.#before = before;
    this.#slope = slope;
  }
}

class LineSum implements SymbolKernel {
  readonly #alphabetSize: number;
  #before = 0;
  #slope = 0;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {
    this.#before = 0;
    this.#slope = 0;
  }

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    let before = this.#before;
    let slope = this.#slope;
    for (let i = from; i < to; i++) {
      slope += source[i];
      if (slope >= alphabetSize) slope -= alphabetSize;
      before += slope;
      if (before >= alphabetSize) before -= alphabetSize;
      target[i] = before;
    }
    this.#before = before;
    this.#slope = slope;
  }
}
