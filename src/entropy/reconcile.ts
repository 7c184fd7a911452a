import type { OrderEntropy } from './entropy-by-order.ts';

/**
 * One sentence that reconciles which orders are estimable (are the data enough to state an entropy?) with which are
 * useful (does a coder save bits on data it has not seen?).
 */
export function reconcileSentence(
  orders: readonly Pick<OrderEntropy, 'k' | 'estimable' | 'useful'>[],
): string {
  const estimable = orders.findLast((order) => order.estimable)?.k;
  const useful = orders.findLast((order) => order.useful === true)?.k;
  const tested = orders.some((order) => order.useful !== undefined);
  if (!tested) {
    return estimable === undefined
      ? 'These data are too few to state an entropy at any order; which orders help a coder was not tested.'
      : `These data are enough to state an entropy up to order ${estimable}; which orders help a coder was not tested.`;
  }
  if (estimable === undefined) {
    return useful === undefined
      ? 'These data are too few to state an entropy at any order, and no order tested saves bits on data held out.'
      : `These data are too few to state an entropy at any order, yet order ${useful} saves bits on data held out: judge by what coders reach.`;
  }
  if (useful === undefined) {
    return `These data are enough to state an entropy up to order ${estimable}, but no order tested saves bits on data held out: they look like noise, or change between their two halves.`;
  }
  if (useful === estimable) {
    return `Order ${estimable} is both the highest at which these data are enough to state an entropy and the highest that saves bits on data held out.`;
  }
  if (useful > estimable) {
    return `Order ${useful} still saves bits on data held out, but these data are enough to state an entropy only up to order ${estimable}: a coder may profit from an order whose entropy cannot be stated.`;
  }
  return `These data are enough to state an entropy up to order ${estimable}, but what the first half teaches of orders above ${useful} saves no bits on the second.`;
}
