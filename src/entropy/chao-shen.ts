import type { OrderCounts } from '../models/context-counts.ts';
import type { Tallies } from '../models/context-counts-tallies.ts';
import type { CountEstimator } from './estimator.ts';

/**
 * Entropy of blocks seen as often as `tallies` say: frequencies shrunk by the coverage that Good and Turing estimate
 * (one less singleton where all are singletons, which else would give 0), each term weighted by 1 ÷ (the chance to have
 * been seen at all). Bits a block, 0 for none.
 */
export function chaoShenBlockBits(tallies: Tallies): number {
  const { values, times, total } = tallies;
  if (total === 0) return 0;
  const singletons = values[0] === 1 ? times[0] : 0;
  const coverage = 1 - (singletons === total ? total - 1 : singletons) / total;
  let sum = 0;
  for (let i = 0; i < values.length; i++) {
    const p = (coverage * values[i]) / total;
    const seen = -Math.expm1(total * Math.log1p(-p));
    sum -= (times[i] * p * Math.log2(p)) / seen;
  }
  return sum;
}

/** H(k + 1) − H(k) over the same positions. */
export const chaoShen: CountEstimator = {
  name: 'Chao–Shen',
  source:
    'A. Chao, T.-J. Shen, "Nonparametric estimation of Shannon’s index of diversity when there are unseen species in sample", 2003',
  validity:
    'For independent draws, also where many cells were never seen; of little use once nearly all were seen once. From order 1 on a difference of two such figures, whose errors need not cancel: neighbouring blocks overlap, so they are no independent draws.',
  estimate({ pairTallies, contextTallies }: OrderCounts): number {
    return Math.max(0, chaoShenBlockBits(pairTallies) - chaoShenBlockBits(contextTallies));
  },
};
