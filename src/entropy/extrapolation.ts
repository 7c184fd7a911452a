import type { OrderEntropy } from './entropy-by-order.ts';

/** Share of H_0 by which the law may miss an order. */
const LARGEST_MISS_SHARE = 0.02;
/** A ratio above this says that the orders counted hardly bend yet: the limit would be a guess. */
const LARGEST_RATIO = 0.9;
const FEWEST_ORDERS = 3;

/** What the entropies of the estimable orders would fall to if they went on falling as they do. An estimate, never a bound. */
export interface Extrapolation {
  /** h of the law, bits per symbol. */
  readonly bitsPerSymbol: number;
  /** b of the law: what is left of the excess from one order to the next. */
  readonly ratio: number;
  /** Highest order used. */
  readonly upto: number;
  /** Largest distance of the law from an order used, in bits per symbol. */
  readonly miss: number;
  readonly valid: boolean;
  /** Why it is not valid, or how well the law fits; half a sentence. */
  readonly reason: string;
}

/**
 * Fits H_k = h + c · b^k, 0 < b < 1, to the corrected entropies of all estimable orders by least squares: the law of a
 * source whose memory fades by the same share with each symbol. Sources with long repeats or power-law memory fade more
 * slowly, so the figure says what follows from the orders counted, no more.
 * @returns undefined for fewer than three estimable orders
 * Source: the idea of extrapolating block-entropy differences: T. Schürmann, P. Grassberger, "Entropy estimation of symbol
 * sequences", 1996, where a slower law stands in for the geometric one here.
 */
export function extrapolate(
  orders: readonly Pick<OrderEntropy, 'k' | 'corrected' | 'estimable'>[],
): Extrapolation | undefined {
  const rates = orders.filter((order) => order.estimable).map((order) => order.corrected);
  if (rates.length < FEWEST_ORDERS) return undefined;
  let low = Number.EPSILON;
  let high = 1 - 1e-6;
  // The best ratio by golden section, h and c being linear given it.
  const share = (Math.sqrt(5) - 1) / 2;
  for (let i = 0; i < 80; i++) {
    const a = high - share * (high - low);
    const b = low + share * (high - low);
    if (fitGiven(rates, a).squares <= fitGiven(rates, b).squares) high = b;
    else low = a;
  }
  const ratio = (low + high) / 2;
  const { limit, scale, miss } = fitGiven(rates, ratio);
  const fault = faultOf(rates, ratio, limit, scale, miss);
  return {
    bitsPerSymbol: Math.max(0, limit),
    ratio,
    upto: rates.length - 1,
    miss,
    valid: fault === undefined,
    reason:
      fault ??
      `each order keeps ${(100 * ratio).toFixed(0)} % of the excess of the one below; largest miss ${miss.toFixed(3)} bits`,
  };
}

function faultOf(
  rates: readonly number[],
  ratio: number,
  limit: number,
  scale: number,
  miss: number,
): string | undefined {
  if (rates.some((rate, k) => k > 0 && !(rate < rates[k - 1]))) {
    return 'the entropies do not fall with every order: there is nothing to extrapolate';
  }
  if (ratio > LARGEST_RATIO) return 'the entropies do not level off yet';
  if (limit < 0) return 'the law would fall below 0 bits';
  if (!(scale > 0) || miss > LARGEST_MISS_SHARE * rates[0]) {
    return `the entropies follow another law: it misses one by ${miss.toFixed(3)} bits`;
  }
  return undefined;
}

interface Fit {
  readonly limit: number;
  readonly scale: number;
  readonly squares: number;
  readonly miss: number;
}

/** Least squares for h and c, the ratio being given. */
function fitGiven(rates: readonly number[], ratio: number): Fit {
  const count = rates.length;
  let x = 0;
  let y = 0;
  for (let k = 0; k < count; k++) {
    x += ratio ** k / count;
    y += rates[k] / count;
  }
  let xx = 0;
  let xy = 0;
  for (let k = 0; k < count; k++) {
    xx += (ratio ** k - x) ** 2;
    xy += (ratio ** k - x) * (rates[k] - y);
  }
  const scale = xy / xx;
  const limit = y - scale * x;
  let squares = 0;
  let miss = 0;
  for (let k = 0; k < count; k++) {
    const distance = Math.abs(limit + scale * ratio ** k - rates[k]);
    squares += distance * distance;
    if (distance > miss) miss = distance;
  }
  return { limit, scale, squares, miss };
}
