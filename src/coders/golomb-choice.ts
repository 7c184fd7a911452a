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
 * Between two powers of two the remainders keep their width b. As m grows there by one, a word can only become shorter, but
 * for one case: a symbol below m, which is its own remainder, becomes a long one when m reaches 2^b − symbol. So the best
 * divisor, and of equals the greatest, stands just before such a place, at a power of two, or at the end of the range; only those
 * are weighed, and of those only the ones whose least thinkable cost does not pass the best so far.
 *
 * To weigh one: with T(x) the symbols that are x or more, the quotients by m sum to T(m) + T(2m) + …, and T at the bounds of
 * the long remainders counts those; or, where that is less, symbol by symbol.
 *
 * Cost: D distinct symbols up to v: some D · min(D, v / mean) steps.
 */
export class DivisorChoice implements ParameterChooser {
  #counts: SymbolCounts | undefined;
  #sum = 0;
  #largest = 0;
  #tails = new Float64Array(64);
  #hasTails = false;
  #best = 0;
  #bestBits = 0;

  choose(counts: SymbolCounts): ChosenParameter {
    const { total, seen, seenCount } = counts;
    const greatest = Math.min(LARGEST_DIVISOR, counts.counts.length);
    if (total === 0) return { parameter: greatest, bits: 0 };
    this.#counts = counts;
    this.#sum = 0;
    this.#largest = 0;
    for (let i = 0; i < seenCount; i++) {
      this.#largest = Math.max(this.#largest, seen[i]);
      this.#sum += seen[i] * counts.counts[seen[i]];
    }
    this.#hasTails = false;
    this.#best = greatest;
    this.#bestBits = this.#bitsOf(greatest);

    // The powers of two, which are few, tell where the best can be.
    for (let m = 1; m <= greatest; m *= 2) this.#weigh(m);
    const widest = divisorWidth(greatest);
    for (let width = 2; width <= widest && total * width <= this.#bestBits; width++) {
      const above = 2 ** (width - 1);
      for (let i = 0; i < seenCount; i++) {
        const m = 2 ** width - 1 - seen[i];
        if (m > above && m < greatest) this.#weigh(m);
      }
    }
    this.#counts = undefined;
    return { parameter: this.#best, bits: this.#bestBits };
  }

  #weigh(m: number): void {
    const { total } = this.#counts!;
    // Quotients are least when every remainder is the largest.
    const quotients = Math.max(0, Math.floor((this.#sum - total * (m - 1)) / m));
    if (total * divisorWidth(m) + quotients > this.#bestBits) return;
    const bits = this.#bitsOf(m);
    if (bits < this.#bestBits || (bits === this.#bestBits && m > this.#best)) {
      this.#best = m;
      this.#bestBits = bits;
    }
  }

  /** Length of all symbols under divisor m. */
  #bitsOf(m: number): number {
    const counts = this.#counts!;
    // Every word has a one and width − 1 bits; each quotient and each long remainder adds to it.
    const bits = counts.total * divisorWidth(m);
    const { seenCount } = counts;
    // Tails take a walk over all values first: a few symbols never repay it.
    const bySymbols = seenCount * m < 2 * this.#largest || seenCount ** 2 < this.#largest;
    return bits + (bySymbols ? this.#addedBySymbols(counts, m) : this.#addedByTails(counts, m));
  }

  #addedBySymbols(counts: SymbolCounts, m: number): number {
    const short = 2 ** divisorWidth(m) - m;
    let bits = 0;
    for (let i = 0; i < counts.seenCount; i++) {
      const symbol = counts.seen[i];
      const quotient = Math.floor(symbol / m);
      const isLong = symbol - quotient * m >= short;
      bits += counts.counts[symbol] * (isLong ? quotient + 1 : quotient);
    }
    return bits;
  }

  #addedByTails(counts: SymbolCounts, m: number): number {
    if (!this.#hasTails) this.#countTails(counts);
    const tails = this.#tails;
    const largest = this.#largest;
    const short = 2 ** divisorWidth(m) - m;
    let bits = 0;
    for (let at = m; at <= largest; at += m) bits += tails[at];
    for (let at = short; at <= largest; at += m)
      bits += tails[at] - tails[Math.min(at + m - short, largest + 1)];
    return bits;
  }

  /** Sets T(0 … largest + 1). */
  #countTails(counts: SymbolCounts): void {
    const largest = this.#largest;
    if (this.#tails.length < largest + 2)
      this.#tails = new Float64Array(Math.max(largest + 2, 2 * this.#tails.length));
    const tails = this.#tails;
    let tail = 0;
    tails[largest + 1] = 0;
    for (let symbol = largest; symbol >= 0; symbol--) {
      tail += counts.counts[symbol];
      tails[symbol] = tail;
    }
    this.#hasTails = true;
  }
}
