import { BugError } from '../errors/errors.ts';
import type { ContextScope } from '../models/context-counts.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import type { OrderEntropy } from './entropy-by-order.ts';

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

/**
 * The floor by its rule: high is the lowest ceiling; the point is the least of high and the corrected entropy at the
 * largest estimable order; low is the least low end of the intervals of estimable orders, and never above the point.
 * Where no order is estimable the point is the ceiling. There, and where the ceiling lies below the corrected entropy,
 * the intervals of estimable orders say nothing of how far down the rate may lie: those of all orders counted stand in,
 * which too few data can only pull down.
 * @param ceilings  at least one; a code of equal lengths always exists
 */
export function floorOf({
  orders,
  ceilings,
}: {
  readonly orders: readonly FloorOrder[];
  readonly ceilings: readonly Ceiling[];
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
  const cut = high < largest.corrected;
  const point = Math.min(high, largest.corrected);
  return {
    point,
    low: leastLow(cut ? orders : estimable, point),
    high,
    method: cut
      ? `what ${lowest.name} reaches, below the corrected entropy of order ${largest.k}`
      : `corrected entropy of order ${largest.k} (Miller–Madow) with a simple interval`,
    cut,
    order: largest.k,
  };
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
  sequence: SymbolSequence,
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
