import type { SymbolCounts } from './huffman-counts.ts';
import type { ChosenParameter, ParameterChooser } from './integer-family.ts';

/** Largest divisor that is given or chosen. */
export const LARGEST_DIVISOR = 2 ** 20;

/** ⌈log2 m⌉ for m = 1 … 2^31. */
export function divisorWidth(m: number): number {
  return 32 - Math.clz32(m - 1);
}

/**
 * Finds the best divisor of a Golomb code by exact cost.
 *
 * With T(x) the symbols that are x or more, the quotients by m sum to T(m) + T(2m) + …, and T at the bounds of the long
 * remainders counts those: one divisor is weighed in (largest symbol) / m steps, however many symbols there are. Divisors
 * whose least thinkable cost passes the best so far are not weighed; those left lie within a small factor of the mean.
 *
 * Cost: about six steps a value up to the largest symbol, beside one comparison a divisor up to the mean.
 */
export class DivisorChoice implements ParameterChooser {
  #tails = new Float64Array(64);
  #largest = 0;
  #total = 0;

  choose(counts: SymbolCounts): ChosenParameter {
    const greatest = Math.min(LARGEST_DIVISOR, counts.counts.length);
    const total = counts.total;
    if (total === 0) return { parameter: greatest, bits: 0 };
    const sum = this.#countTails(counts);
    // Near the best divisor of a geometric source, which is ln 2 times the mean; it decides only where the search starts.
    const first = Math.min(greatest, Math.max(1, Math.floor((7 * sum) / (10 * total))));
    let best = first;
    let bestBits = this.#bitsOf(first);
    for (let m = first - 1; m >= 1; m--) {
      const quotients = Math.floor((sum - total * (m - 1)) / m);
      if (total * divisorWidth(m) + quotients > bestBits) continue;
      const bits = this.#bitsOf(m);
      if (bits < bestBits) {
        best = m;
        bestBits = bits;
      }
    }
    for (let m = first + 1; m <= greatest && total * divisorWidth(m) <= bestBits; m++) {
      const bits = this.#bitsOf(m);
      if (bits < bestBits || (bits === bestBits && m > best)) {
        best = m;
        bestBits = bits;
      }
    }
    return { parameter: best, bits: bestBits };
  }

  /** Sets T(0 … largest + 1); returns the sum of all symbols. */
  #countTails(counts: SymbolCounts): number {
    let largest = 0;
    let sum = 0;
    for (let i = 0; i < counts.seenCount; i++) {
      const symbol = counts.seen[i];
      if (symbol > largest) largest = symbol;
      sum += symbol * counts.counts[symbol];
    }
    if (this.#tails.length < largest + 2)
      this.#tails = new Float64Array(Math.max(largest + 2, 2 * this.#tails.length));
    const tails = this.#tails;
    let tail = 0;
    tails[largest + 1] = 0;
    for (let symbol = largest; symbol >= 0; symbol--) {
      tail += counts.counts[symbol];
      tails[symbol] = tail;
    }
    this.#largest = largest;
    this.#total = counts.total;
    return sum;
  }

  /** Length of all symbols under divisor m. */
  #bitsOf(m: number): number {
    const tails = this.#tails;
    const largest = this.#largest;
    const width = divisorWidth(m);
    const short = 2 ** width - m;
    // Every word has a one and width − 1 bits; each quotient and each long remainder adds to it.
    let bits = this.#total * width;
    for (let at = m; at <= largest; at += m) bits += tails[at];
    for (let at = short; at <= largest; at += m)
      bits += tails[at] - tails[Math.min(at + m - short, largest + 1)];
    return bits;
  }
}
