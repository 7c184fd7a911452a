import type { OrderCounts } from '../models/context-counts.ts';

/**
 * An estimator of conditional entropy that needs no more than how often contexts and pairs were seen.
 *
 * A further one is one more file that exports such an object.
 */
export interface CountEstimator {
  readonly name: string;
  /** Author, year, section. */
  readonly source: string;
  /** Where its figure can be relied on, as a sentence. */
  readonly validity: string;
  /** Bits per symbol, given k predecessors; 0 where the order has no positions. */
  estimate(counts: OrderCounts): number;
}
