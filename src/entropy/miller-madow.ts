import type { OrderCounts } from '../models/context-counts.ts';
import type { CountEstimator } from './estimator.ts';
import { plugIn } from './plug-in.ts';

/**
 * What the plug-in entropy misses on average: (P − C) ÷ (2N ln 2) bits per symbol, P − C being the free parameters of
 * all contexts seen.
 */
export function millerMadowTerm({
  positions,
  contexts,
  pairs,
}: {
  readonly positions: number;
  readonly contexts: number;
  readonly pairs: number;
}): number {
  return positions === 0 ? 0 : (pairs - contexts) / (2 * positions * Math.LN2);
}

/** Plug-in entropy with its first-order bias added; may exceed log2 of the alphabet size by its own error. */
export const millerMadow: CountEstimator = {
  name: 'Miller–Madow',
  source:
    'G. A. Miller, "Note on the bias of information estimates", 1955 (and W. G. Madow); summed over contexts',
  validity:
    'Where the correction is small beside the entropy and each context is seen often; see the rule for estimable orders.',
  estimate(counts: OrderCounts): number {
    return plugIn.estimate(counts) + millerMadowTerm(counts);
  },
};
