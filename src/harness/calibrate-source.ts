import type { SymbolArray } from '../symbols/sequence.ts';

/** Both ends of what is known of a rate, bits per symbol; equal where it is known exactly. */
export interface KnownRate {
  readonly low: number;
  readonly high: number;
}

/** A random source of symbols about which everything that an estimator estimates is known by calculation. */
export interface CalibrationSource {
  readonly name: string;
  /** Half a sentence for screens. */
  readonly description: string;
  readonly alphabetSize: number;
  /** The least k whose k predecessors say all that the past can say; undefined where no k does, or the source changes. */
  readonly order: number | undefined;
  /** Undefined for a source that changes as it goes: it has no one rate. */
  readonly rate: KnownRate | undefined;
  /** All symbols equally likely whatever the past. */
  readonly uniform: boolean;
  /** Whether the law stays the same from the first symbol to the last. */
  readonly stationary: boolean;
  /** Exact conditional entropy given k predecessors, bits; undefined where it is not known. */
  conditionalBits(k: number): number | undefined;
  /** A stretch of the source from its stationary law; the same for the same seed on every machine. */
  draw(length: number, seed: string): SymbolArray;
  /** −log2 of the probability of exactly these symbols, in bits; undefined where it is not known. */
  informationBits(symbols: SymbolArray): number | undefined;
}

/** Order at which a source without an order of its own is coded and estimated. */
const USUAL_ORDER = 4;

/** The order at which coders and the further estimators are asked about a source. */
export function askedOrder({ order }: CalibrationSource): number {
  return order ?? USUAL_ORDER;
}

/** x · log2(1/x), 0 at 0. */
export function entropyTerm(probability: number): number {
  return probability <= 0 ? 0 : -probability * Math.log2(probability);
}
