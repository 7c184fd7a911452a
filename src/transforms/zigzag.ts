import type { SymbolArray } from '../symbols/sequence.ts';
import { type SymbolKernel, symbolwise } from './symbolwise.ts';

/**
 * `zigzag`: a residue modulo m read as a signed number of least size, and signed numbers put in order of size:
 * 0, −1, 1, −2, 2 … become 0, 1, 2, 3, 4 … So small differences of either sign become small symbols.
 *
 * The residues r below m/2 stand for r, the others for r − m.
 */
export const zigzag = symbolwise({
  name: 'zigzag',
  forward: (alphabetSize) => new Fold(alphabetSize),
  inverse: (alphabetSize) => new Unfold(alphabetSize),
});

class Fold implements SymbolKernel {
  readonly #alphabetSize: number;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {}

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const twice = 2 * this.#alphabetSize - 1;
    const half = this.#alphabetSize / 2;
    for (let i = from; i < to; i++) {
      const symbol = source[i];
      target[i] = symbol < half ? 2 * symbol : twice - 2 * symbol;
    }
  }
}

class Unfold implements SymbolKernel {
  readonly #alphabetSize: number;

  constructor(alphabetSize: number) {
    this.#alphabetSize = alphabetSize;
  }

  restart(): void {}

  apply(source: SymbolArray, target: SymbolArray, from: number, to: number): void {
    const alphabetSize = this.#alphabetSize;
    for (let i = from; i < to; i++) {
      const folded = source[i];
      const size = folded >>> 1;
      target[i] = (folded & 1) === 0 ? size : alphabetSize - 1 - size;
    }
  }
}
