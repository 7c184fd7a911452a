import { SeededGenerator } from '../statistics/generator.ts';
import { stationaryShares } from '../statistics/linear-solve.ts';
import { drawShare } from './calibrate-draw.ts';
import { type CalibrationSource, entropyTerm } from './calibrate-source.ts';

/** A chain of hidden states, each of which shows a bit by its own law. */
export interface HiddenLaw {
  readonly name: string;
  readonly description: string;
  /** Shape [states][states]; rows sum to 1. */
  readonly transitions: readonly (readonly number[])[];
  /** For each state the probability that it shows 1. */
  readonly ones: readonly number[];
  /** Symbols over which the bounds are taken; 2^span strings are visited. */
  readonly span: number;
}

/**
 * A hidden Markov source of bits. Its rate has no closed form, but lies between H(Yₙ | Yⁿ⁻¹, X₁) and H(Yₙ | Yⁿ⁻¹), both
 * exact sums over all strings of n symbols; the latter is also the conditional entropy of order n − 1.
 * Source: Cover & Thomas, "Elements of Information Theory", 2nd ed. 2006, §4.5, theorem 4.5.1.
 */
export function hiddenMarkovSource({
  name,
  description,
  transitions,
  ones,
  span,
}: HiddenLaw): CalibrationSource {
  const states = ones.length;
  const chain = Float64Array.from(transitions.flat());
  const shares = stationaryShares(chain, states);
  const bits = new Map<number, number>();
  const conditional = (k: number): number | undefined => {
    if (k + 1 > span) return undefined;
    const known = bits.get(k);
    if (known !== undefined) return known;
    const value = blockBits(k + 1, shares, chain, ones) - blockBits(k, shares, chain, ones);
    bits.set(k, value);
    return value;
  };
  let low = 0;
  for (let state = 0; state < states; state++) {
    const start = new Float64Array(states);
    start[state] = 1;
    low +=
      shares[state] *
      (blockBits(span, start, chain, ones) - blockBits(span - 1, start, chain, ones));
  }
  return {
    name,
    description,
    alphabetSize: 2,
    order: undefined,
    rate: { low, high: conditional(span - 1)! },
    uniform: false,
    stationary: true,
    conditionalBits: conditional,
    draw(length, seed) {
      const generator = new SeededGenerator(seed);
      const symbols = new Uint8Array(length);
      let state = drawShare(shares, generator);
      for (let i = 0; i < length; i++) {
        symbols[i] = generator.real() < ones[state] ? 1 : 0;
        let left = generator.real();
        let next = 0;
        while (next < states - 1 && left >= chain[state * states + next]) {
          left -= chain[state * states + next++];
        }
        state = next;
      }
      return symbols;
    },
    informationBits(symbols) {
      let forward = shares.slice();
      let total = 0;
      for (let i = 0; i < symbols.length; i++) {
        const shown = forward.map((share, s) => share * (symbols[i] === 1 ? ones[s] : 1 - ones[s]));
        let sum = 0;
        for (const share of shown) sum += share;
        total -= Math.log2(sum);
        forward = step(shown, chain).map((share) => share / sum);
      }
      return total;
    },
  };
}

function step(shares: Float64Array, chain: Float64Array): Float64Array {
  const states = shares.length;
  const next = new Float64Array(states);
  for (let from = 0; from < states; from++) {
    for (let to = 0; to < states; to++) next[to] += shares[from] * chain[from * states + to];
  }
  return next;
}

/** Entropy of the first `length` bits when the first state has these shares. */
function blockBits(
  length: number,
  start: Float64Array,
  chain: Float64Array,
  ones: readonly number[],
): number {
  const visit = (shares: Float64Array, left: number): number => {
    if (left === 0) {
      let probability = 0;
      for (const share of shares) probability += share;
      return entropyTerm(probability);
    }
    const one = shares.map((share, s) => share * ones[s]);
    const zero = shares.map((share, s) => share * (1 - ones[s]));
    const last = left === 1;
    return (
      visit(last ? one : step(one, chain), left - 1) +
      visit(last ? zero : step(zero, chain), left - 1)
    );
  };
  return visit(start, length);
}
