import { BugError } from '../errors/errors.ts';
import type { ContextScope } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { OrderEntropy } from './entropy-by-order.ts';
import type { MatchLengthEntropy } from './match-lengths.ts';

/** A rate that a real, verified decoder reaches. */
export interface Ceiling {
  readonly name: string;
  readonly bitsPerSymbol: number;
}

/** An estimate of the entropy rate in its band; bits per symbol, low ≤ point ≤ high. */
export interface Floor {
  readonly point: number;
  readonly low: number;
  /** A bound: the lowest ceiling known. */
  readonly high: number;
  /** What gave the point; half a sentence. */
  readonly method: string;
  /** The ceiling lies below the corrected entropy: order `order` is not enough for this source. */
  readonly cut: boolean;
  /** Largest estimable order, −1 for none. */
  readonly order: number;
}

/** What the rule needs of an order. */
type FloorOrder = Pick<OrderEntropy, 'k' | 'corrected' | 'low' | 'estimable'>;

/** What the rule needs of match lengths. */
type FloorMatches = Pick<MatchLengthEntropy, 'bitsPerSymbol' | 'low' | 'high' | 'valid'>;

/**
 * The floor by its rule: high is the lowest ceiling; the point is the least of high, the corrected entropy at the largest
 * estimable order, and the match-length estimate; low is the least low end of the intervals of estimable orders and of
 * match lengths, and never above the point.
 *
 * Match lengths give the point only where their whole interval lies below the corrected entropy: the least of two
 * estimates of one thing would else lie below it by chance, and counts are the sharper of the two.
 *
 * Where high lies below the better estimate, but within its interval, the band keeps that interval's lower half, now below
 * high. Where it lies below the whole interval, or no order is estimable, no interval says how far down the rate may lie:
 * those of all orders counted stand in, which too few data can only pull down.
 * @param ceilings  at least one; a code of equal lengths always exists
 * @param matches   absent or not valid: not used
 */
export function floorOf({
  orders,
  ceilings,
  matches,
}: {
  readonly orders: readonly FloorOrder[];
  readonly ceilings: readonly Ceiling[];
  readonly matches?: FloorMatches | undefined;
}): Floor {
  if (ceilings.length === 0) throw new BugError('a floor was asked for without any ceiling');
  const lowest = ceilings.reduce((a, b) => (b.bitsPerSymbol < a.bitsPerSymbol ? b : a));
  const high = lowest.bitsPerSymbol;
  const estimable = orders.filter((order) => order.estimable);
  const largest = estimable.at(-1);
  if (largest === undefined) {
    return {
      point: high,
      low: leastLow(orders, high),
      high,
      method: `what ${lowest.name} reaches, since no order is estimable`,
      cut: false,
      order: -1,
    };
  }
  const valid = matches?.valid === true ? matches : undefined;
  const beyond = valid !== undefined && valid.high < largest.corrected;
  const estimate = beyond ? valid.bitsPerSymbol : largest.corrected;
  const estimateLow = beyond ? valid.low : largest.low;
  const point = Math.min(high, estimate);
  const leastKnown = Math.min(leastLow(estimable, point), valid?.low ?? point);
  return {
    point,
    low:
      high < estimateLow
        ? leastLow(orders, leastKnown)
        : Math.max(0, Math.min(leastKnown, point - (estimate - estimateLow))),
    high,
    method: methodOf(lowest, largest.k, point === estimate, beyond),
    cut: high < largest.corrected,
    order: largest.k,
  };
}

function methodOf(lowest: Ceiling, order: number, estimated: boolean, beyond: boolean): string {
  if (estimated && !beyond) return `corrected entropy of order ${order} (Miller–Madow)`;
  const giver = estimated
    ? 'match lengths, flagged (their interval holds chance, not bias)'
    : `what ${lowest.name} reaches`;
  return `${giver}, below the corrected entropy of order ${order}`;
}

function leastLow(orders: readonly FloorOrder[], point: number): number {
  return orders.reduce((least, order) => Math.min(least, order.low), point);
}

/**
 * Bits that messages cost beyond the long-run rate since each starts without context: Σ over messages of H_j − H_k for
 * each j below both k and the message's length, with corrected entropies; 0 where contexts run on.
 * @param k  the floor's largest estimable order; below 1 the sum is empty
 */
export function openingBits(
  sequence: Pick<SymbolSequence, 'messageEnds'>,
  orders: readonly Pick<OrderEntropy, 'corrected'>[],
  k: number,
  contexts: ContextScope,
): number {
  if (contexts === 'running' || k < 1) return 0;
  const byLength = new Float64Array(k + 1);
  for (let j = 0; j < k; j++) {
    byLength[j + 1] = byLength[j] + orders[j].corrected - orders[k].corrected;
  }
  let bits = 0;
  let from = 0;
  for (const to of sequence.messageEnds) {
    bits += byLength[Math.min(k, to - from)];
    from = to;
  }
  return bits;
}
