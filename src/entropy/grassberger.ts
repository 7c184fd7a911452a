import type { OrderCounts } from '../models/context-counts.ts';
import type { Tallies } from '../models/context-counts-tallies.ts';
import type { CountEstimator } from './estimator.ts';
import { digamma } from './gamma-functions.ts';

/**
 * G(n), which takes the place of ln n. The series of the paper, G(1) = −γ − ln 2, G(2) = 2 − γ − ln 2,
 * G(2k + 1) = G(2k), G(2k + 2) = G(2k) + 2 ÷ (2k + 1), sums to this.
 */
function logStandIn(count: number): number {
  return digamma(Math.floor(count / 2) + 0.5) + Math.LN2;
}

/** Entropy of blocks seen as often as `tallies` say; bits a block, 0 for none. */
export function grassbergerBlockBits(tallies: Tallies): number {
  const { values, times, total } = tallies;
  if (total === 0) return 0;
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += values[i] * times[i] * logStandIn(values[i]);
  return (Math.log(total) - sum / total) / Math.LN2;
}

/** H(k + 1) − H(k) over the same positions; the block of no symbols has entropy 0, known without counting. */
export const grassberger: CountEstimator = {
  name: 'Grassberger',
  source:
    'P. Grassberger, "Entropy Estimates from Insufficient Samplings", 2003 (G of §4, not that of 1988)',
  validity:
    'Where the cells of a block that matter were each seen at least once or twice; with few samples of many cells still too low. From order 1 on a difference of two such figures, whose errors need not cancel.',
  estimate({ order, pairTallies, contextTallies }: OrderCounts): number {
    const contextBits = order === 0 ? 0 : grassbergerBlockBits(contextTallies);
    return Math.max(0, grassbergerBlockBits(pairTallies) - contextBits);
  },
};
