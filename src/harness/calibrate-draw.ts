import type { SeededGenerator } from '../statistics/generator.ts';

/**
 * Laws from which one uniform number draws a symbol in constant time.
 *
 * Source: A. J. Walker, "An efficient method for generating discrete random variables with general distributions", 1977.
 */
export class AliasRows {
  readonly #m: number;
  /** For each cell the share of it that is its own symbol's, and whose the rest is. */
  readonly #own: Float64Array;
  readonly #other: Uint32Array;

  /** @param law  shape [rows · m]; each row sums to 1 */
  constructor(law: Float64Array, m: number) {
    this.#m = m;
    this.#own = new Float64Array(law.length);
    this.#other = new Uint32Array(law.length);
    for (let row = 0; row < law.length; row += m) this.#fill(law, row);
  }

  #fill(law: Float64Array, row: number): void {
    const m = this.#m;
    const height = new Float64Array(m);
    const low: number[] = [];
    const high: number[] = [];
    for (let s = 0; s < m; s++) {
      height[s] = law[row + s] * m;
      this.#own[row + s] = 1;
      this.#other[row + s] = s;
      (height[s] < 1 ? low : high).push(s);
    }
    while (low.length > 0 && high.length > 0) {
      const small = low.pop()!;
      const large = high[high.length - 1];
      this.#own[row + small] = height[small];
      this.#other[row + small] = large;
      height[large] -= 1 - height[small];
      if (height[large] < 1) low.push(high.pop()!);
    }
    // What rounding left over is within a hair of full, but never lets an impossible symbol through.
    for (const s of low) if (law[row + s] === 0) this.#giveAway(law, row, s);
  }

  #giveAway(law: Float64Array, row: number, symbol: number): void {
    let likeliest = 0;
    for (let s = 1; s < this.#m; s++) if (law[row + s] > law[row + likeliest]) likeliest = s;
    this.#own[row + symbol] = 0;
    this.#other[row + symbol] = likeliest;
  }

  /** @param uniform  0 ≤ uniform < 1 */
  draw(row: number, uniform: number): number {
    const scaled = uniform * this.#m;
    const symbol = Math.floor(scaled);
    const cell = row * this.#m + symbol;
    return scaled - symbol < this.#own[cell] ? symbol : this.#other[cell];
  }
}

/** An index drawn by its share; shares sum to 1. */
export function drawShare(shares: Float64Array, generator: SeededGenerator): number {
  let left = generator.real();
  let last = 0;
  for (let i = 0; i < shares.length; i++) {
    if (shares[i] === 0) continue;
    if (left < shares[i]) return i;
    left -= shares[i];
    last = i;
  }
  return last;
}
