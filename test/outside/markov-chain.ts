import type { SeededGenerator } from '../../src/statistics/generator.ts';

/** A stationary source of order k: the law of the next symbol for each context, contexts numbered with the newest symbol last. */
export interface MarkovSource {
  readonly alphabetSize: number;
  readonly order: number;
  /** Shape [m^k][m]. */
  readonly law: readonly (readonly number[])[];
}

const nextContext = ({ alphabetSize, law }: MarkovSource, context: number, symbol: number) =>
  (context * alphabetSize + symbol) % law.length;

/** Draws `length` symbols after a run-in of 1000. */
export function simulate(
  source: MarkovSource,
  length: number,
  generator: SeededGenerator,
): Uint8Array {
  const symbols = new Uint8Array(length);
  let context = 0;
  for (let i = -1000; i < length; i++) {
    let left = generator.real();
    let symbol = 0;
    const row = source.law[context];
    while (symbol < row.length - 1 && left >= row[symbol]) left -= row[symbol++];
    if (i >= 0) symbols[i] = symbol;
    context = nextContext(source, context, symbol);
  }
  return symbols;
}

const information = (p: number) => (p === 0 ? 0 : -p * Math.log2(p));

/** The share of time spent in each context, by iterating the chain averaged with staying (which also tames periods). */
function stationary(source: MarkovSource): number[] {
  let shares = source.law.map(() => 1 / source.law.length);
  for (let step = 0; step < 20_000; step++) {
    const next = shares.map((share) => share / 2);
    source.law.forEach((row, context) => {
      row.forEach((p, symbol) => {
        next[nextContext(source, context, symbol)] += (shares[context] * p) / 2;
      });
    });
    shares = next;
  }
  return shares;
}

/**
 * Entropy rate, and the variance per symbol of −log2 p(x | context) along the chain, correlations included: the sum of
 * all autocovariances, by the martingale form of the central limit theorem (Gordin & Lifšic 1978, from memory): with u solving
 * u = h − H + T u, it is E[(−log2 p − H)²] + 2 E[(−log2 p − H) u(next context)].
 */
export function rateAndVariance(source: MarkovSource): { rate: number; variance: number } {
  const shares = stationary(source);
  const entropies = source.law.map((row) => row.reduce((sum, p) => sum + information(p), 0));
  const rate = entropies.reduce((sum, h, context) => sum + shares[context] * h, 0);
  // The halved chain has the same fixed point up to the factor 2 of its slower steps.
  let u = entropies.map(() => 0);
  for (let step = 0; step < 20_000; step++) {
    u = source.law.map((row, context) => {
      let ahead = 0;
      row.forEach((p, symbol) => {
        ahead += p * u[nextContext(source, context, symbol)];
      });
      return (u[context] + ahead + entropies[context] - rate) / 2;
    });
  }
  let variance = 0;
  source.law.forEach((row, context) => {
    row.forEach((p, symbol) => {
      if (p === 0) return;
      const excess = -Math.log2(p) - rate;
      const later = u[nextContext(source, context, symbol)];
      variance += shares[context] * p * excess * (excess + 2 * later);
    });
  });
  return { rate, variance };
}
