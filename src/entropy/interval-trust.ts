import { FEWEST_UNITS } from './interval-units.ts';

/**
 * On fewer positions, intervals miss unnoticed where a source stays in one mood for a hundred symbols: what such data have in
 * common cannot be told from what the source has.
 */
const FEWEST_POSITIONS = 800;

/** What the rule looks at, of one order. */
export interface TrustQuestion {
  readonly k: number;
  readonly estimable: boolean;
  readonly low: number;
  readonly high: number;
  readonly positions: number;
  /** Units with positions, resampled for the interval. */
  readonly units: number;
}

export interface TrustVerdict {
  /** The interval holds what it promises, as far as the data themselves can tell; else it may miss. */
  readonly intervalTrusted: boolean;
  /** Why, as half a sentence. */
  readonly intervalReason: string;
}

/**
 * Whether the interval of each order is to be relied on: the order is estimable, there are {@link FEWEST_POSITIONS} positions
 * and {@link FEWEST_UNITS} units or more, no change of the source is known, and the next order, where it is estimable, does not lie below with its whole
 * interval. In the last case symbols still depend on one another given the context, which the correction and the spread
 * take them not to, and the entropy of this order is no longer what an entropy rate would be held against.
 *
 * @param orders   lowest first
 * @param changes  the source is known to change along the data
 */
export function trustIntervals(orders: readonly TrustQuestion[], changes: boolean): TrustVerdict[] {
  return orders.map(({ k, estimable, low, positions, units }, i) => {
    const refuse = (intervalReason: string): TrustVerdict => ({
      intervalTrusted: false,
      intervalReason,
    });
    if (!estimable) return refuse(`order ${k} is not estimable`);
    if (positions < FEWEST_POSITIONS) {
      return refuse(`${positions} positions are too few, ${FEWEST_POSITIONS} are needed`);
    }
    if (units < FEWEST_UNITS) {
      return refuse(`${units} units say too little of their spread, ${FEWEST_UNITS} are needed`);
    }
    if (changes) return refuse('the source changes along the data');
    const next = orders[i + 1];
    if (next?.estimable === true && next.high < low) {
      return refuse(`order ${next.k} lies below with its whole interval: order ${k} is not enough`);
    }
    return { intervalTrusted: true, intervalReason: `drawn from ${units} units` };
  });
}
