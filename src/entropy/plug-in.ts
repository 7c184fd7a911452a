import type { OrderCounts } from '../models/context-counts.ts';
import { log2OfCount, type Tallies } from '../models/context-counts-tallies.ts';
import type { CountEstimator } from './estimator.ts';

/** Σ c · log2 c over all counts. */
function weightedLogs(tallies: Tallies): number {
  let sum = 0;
  for (let i = 0; i < tallies.values.length; i++) {
    sum += tallies.values[i] * tallies.times[i] * log2OfCount(tallies.values[i]);
  }
  return sum;
}

/** The entropy of the counted frequencies themselves, taken for probabilities. */
export const plugIn: CountEstimator = {
  name: 'plug-in',
  source: 'C. E. Shannon, "A Mathematical Theory of Communication", 1948, §7 (conditional entropy)',
  validity:
    'Too low on any finite sample, by about (P − C) ÷ (2N ln 2) bits; falls to 0 once most contexts are seen once.',
  estimate({ positions, contextTallies, pairTallies }: OrderCounts): number {
    if (positions === 0) return 0;
    // Equal tallies give equal sums, so that a sequence its contexts determine has entropy 0 exactly.
    return Math.max(0, (weightedLogs(contextTallies) - weightedLogs(pairTallies)) / positions);
  },
};
