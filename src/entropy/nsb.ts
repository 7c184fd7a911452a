import { BugError, InputError } from '../errors/errors.ts';
import type { OrderCounts } from '../models/context-counts.ts';
import type { Tallies } from '../models/context-counts-tallies.ts';
import type { CountEstimator } from './estimator.ts';
import { digamma, logRisingFactorial, trigamma } from './gamma-functions.ts';
import { integrateWeighted } from './nsb-integral.ts';

/** The estimator for `cells` cells: of symbols without context, the alphabet's size. */
export function nsb(cells: number): CountEstimator {
  return {
    name: 'Nemenman–Shafee–Bialek',
    source: 'I. Nemenman, F. Shafee, W. Bialek, "Entropy and Inference, Revisited", 2001',
    validity:
      'At order 0, for independent draws from a stated number of cells; made for fewer draws than cells. With far more cells than draws the figure rests on the number of cells, and cells that can never occur pull it.',
    estimate({ order, pairTallies }: OrderCounts): number {
      if (order !== 0) throw new BugError(`NSB was asked for the entropy of order ${order}`);
      return nsbEntropyBits(pairTallies, cells);
    },
  };
}

/**
 * Posterior mean of the entropy under a mixture of symmetric Dirichlet priors that makes the entropy itself nearly
 * uniform beforehand, in bits.
 *
 * The mixture over the concentration β is integrated over ln β in logarithms.
 * @param tallies  how often the cells that were seen were seen
 * @param cells    K: cells there are, seen or not; an integer ≥ the cells seen, up to 10^300
 * @returns 0 for one cell, and where nothing was seen (by convention of the estimators here)
 * @throws InputError for an impossible number of cells
 * Cost: some hundred evaluations, each linear in the different counts.
 */
export function nsbEntropyBits(tallies: Tallies, cells: number): number {
  if (!(cells >= Math.max(1, tallies.distinct)) || cells > 1e300) {
    throw new InputError('the number of cells cannot be right', {
      expected: `at least ${Math.max(1, tallies.distinct)}, as many as were seen, and at most 1e300`,
      got: String(cells),
    });
  }
  if (cells === 1 || tallies.total === 0) return 0;
  const mean = integrateWeighted(
    (logBeta) => logWeight(tallies, cells, logBeta),
    (logBeta) => meanGiven(tallies, cells, Math.exp(logBeta)),
    // Below the first β not even all unseen cells together count, above the second the cells are alike.
    -Math.log(cells) - 60,
    60,
  );
  return mean / Math.LN2;
}

/** ln of evidence × prior density over ln β, up to a constant. */
function logWeight({ values, times, total }: Tallies, cells: number, logBeta: number): number {
  const beta = Math.exp(logBeta);
  let sum = -logRisingFactorial(cells * beta, total);
  for (let i = 0; i < values.length; i++) sum += times[i] * logRisingFactorial(beta, values[i]);
  return sum + logBeta + Math.log(priorSlope(cells, beta));
}

/** d/dβ of the entropy expected beforehand, ψ(Kβ + 1) − ψ(β + 1), in nats. */
function priorSlope(cells: number, beta: number): number {
  if (beta < 100) return cells * trigamma(cells * beta + 1) - trigamma(beta + 1);
  // Leading terms cancel: the series of the difference.
  const s = 1 / (beta * beta);
  const share = 1 / cells;
  return (
    s *
    ((1 - share) / 2 -
      (1 - share ** 2) / (6 * beta) +
      (s / beta) * ((1 - share ** 4) / 30 - (s * (1 - share ** 6)) / 42))
  );
}

/** Mean entropy under the posterior of one Dirichlet prior, in nats. */
function meanGiven(
  { values, times, total, distinct }: Tallies,
  cells: number,
  beta: number,
): number {
  const whole = total + cells * beta;
  let sum = (((cells - distinct) * beta) / whole) * digamma(beta + 1);
  for (let i = 0; i < values.length; i++) {
    sum += ((times[i] * (values[i] + beta)) / whole) * digamma(values[i] + beta + 1);
  }
  return digamma(whole + 1) - sum;
}
