import type { OrderCounts } from '../models/context-counts.ts';
import { sumOfLogs } from '../models/context-counts-tallies.ts';
import type { CountEstimator } from './estimator.ts';

/** The entropy of the counted frequencies themselves, taken for probabilities. */
export const plugIn: CountEstimator = {
  name: 'plug-in',
  source: 'C. E. Shannon, "A Mathematical Theory of Communication", 1948, §7 (conditional entropy)',
  validity:
    'Too low on any finite sample, by about (P − C) ÷ (2N ln 2) bits; falls to 0 once most contexts are seen once.',
  estimate({ positions, contextTallies, pairTallies }: OrderCounts): number {
    if (positions === 0) return 0;
    // Equal tallies give equal sums, so that a sequence its contexts determine has entropy 0 exactly.
    return Math.max(0, (sumOfLogs(contextTallies) - sumOfLogs(pairTallies)) / positions);
  },
};
