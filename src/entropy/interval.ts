import type { OrderCounts } from '../models/context-counts.ts';
import type { Interval } from '../statistics/bootstrap.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';

/** Half-width of a 95 % interval in standard errors, under a normal law. */
const NORMAL_95 = 1.96;

/**
 * A simple interval around a conditional entropy: the estimate ± 1.96 standard errors, cut at 0 and log2 of the alphabet size.
 *
 * The standard error is the spread of −log2(pair count ÷ context count) between contiguous blocks (delta method: to first
 * order the plug-in entropy varies like the mean of that). It knows nothing of the bias that the correction leaves,
 * takes blocks for independent, and is too narrow where the source drifts or few blocks differ; resampled and
 * bias-aware intervals are to replace it. With fewer than two blocks nothing is known: 0 to log2 of the alphabet size.
 *
 * Source: G. P. Basharin, "On a statistical estimate for the entropy of a sequence of independent random variables", 1959
 * (variance of the plug-in entropy, from memory), with block sums in place of single terms.
 */
export function simpleInterval(
  counts: OrderCounts,
  estimate: number,
  alphabetSize: number,
): Interval {
  const most = Math.log2(alphabetSize);
  const error = ratioStandardError(counts.blockBits, counts.blockPositions);
  if (error === undefined) return { low: 0, high: most };
  const within = (bits: number): number => Math.min(most, Math.max(0, bits));
  return {
    low: within(estimate - NORMAL_95 * error),
    high: within(estimate + NORMAL_95 * error),
  };
}
