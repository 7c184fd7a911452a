import type { OrderCounts } from '../models/context-counts.ts';
import type { Tallies } from '../models/context-counts-tallies.ts';
import type { Interval } from '../statistics/bootstrap.ts';
import { chiSquareQuantile, studentQuantile } from '../statistics/normal-law.ts';
import { runSpread } from '../statistics/stationary-bootstrap.ts';
import type { IntervalUnits } from './interval-units.ts';

const LEVEL = 0.95;

/** An interval, and what it was drawn from. */
export interface CorrectedInterval extends Interval {
  /** How many of what were resampled, as in "64 blocks of messages". */
  readonly intervalUnit: string;
  /** Units that hold positions. */
  readonly units: number;
}

/**
 * A 95 % interval of the conditional entropy: the corrected estimate ± the spread of the plug-in entropy under the
 * stationary bootstrap about that bootstrap's own mean, cut at 0 and log2 of the alphabet size.
 *
 * A percentile interval would not do: each resample is plugged in once more, so that its middle lies below the plug-in
 * entropy by the bias which the plug-in entropy has already. Only the spread is taken from the resamples.
 *
 * The spread has two parts, both in closed form, so that no seed and no number of resamples comes in.
 * - To first order the plug-in entropy moves like the mean of −log2(pair count ÷ context count) over positions (its
 *   influence function, Hampel 1974). The mean's variance when runs of successive units are resampled is
 *   {@link runSpread}; runs have a mean length of the cube root of the number of units, the rate at which the error of
 *   such a variance falls fastest (Künsch 1989), and of 1 for files. This is the delta method with block variance as well:
 *   there is one method for all sizes, and it needs no further pass over the data.
 * - The second order is (ν − χ²)/(2N ln 2) with ν = pairs − contexts degrees of freedom (Miller 1955; Billingsley 1961
 *   for contexts). It is all there is where every symbol carries the same information (uniform sources), where a bootstrap
 *   is known to fail: χ² then shows in the first part too and is taken out of it, as the value that each end of the
 *   interval implies.
 *
 * The upper end has an allowance for what the Miller–Madow term misses where pairs are rare ({@link rareBits}): it
 * corrects for pairs seen, so that the estimate stays low by about that much. Where every context was always followed by the
 * same symbol there is no spread to go by: the upper end is what could still be behind it ({@link unseenBits}).
 * @param corrected  the estimate, bits
 * @returns 0 to log2 of the alphabet size where fewer than two units hold positions
 * Cost: the square of the number of units, at most 256.
 */
export function correctedInterval(
  counts: OrderCounts,
  corrected: number,
  alphabetSize: number,
  { text, independent }: Pick<IntervalUnits, 'text' | 'independent'>,
): CorrectedInterval {
  const most = Math.log2(alphabetSize);
  const residuals = unitResiduals(counts);
  const units = residuals.length;
  if (units < 2) return { low: 0, high: most, intervalUnit: text, units };
  const { variance, freedom } = runSpread(residuals, independent ? 1 : Math.cbrt(units));
  const { positions, contexts, pairs } = counts;
  const parameters = pairs - contexts;
  // In units of χ²: an entropy e bits off has e · perBit.
  const perBit = positions * Math.LN2;
  const firstOrder = variance * Math.LN2 ** 2;
  const times = studentQuantile((1 + LEVEL) / 2, freedom);
  const largest = chiSquareQuantile(0.99, parameters);
  // What the interval's width would be if the truth lay `off` bits above the estimate.
  const widthAt = (off: number): number => {
    const chiSquare = Math.min(largest, Math.max(0, parameters + 2 * perBit * off));
    return (times * Math.sqrt(Math.max(0, firstOrder - chiSquare) + parameters / 2)) / perBit;
  };
  const within = (bits: number): number => Math.min(most, Math.max(0, bits));
  return {
    low: within(corrected - endAt((off) => widthAt(-off), widthAt(-Number.MAX_VALUE))),
    high: within(
      parameters === 0
        ? unseenBits(positions, alphabetSize)
        : corrected + endAt(widthAt, widthAt(-Number.MAX_VALUE)) + rareBits(counts),
    ),
    intervalUnit: text,
    units,
  };
}

/**
 * The largest distance that the width at that distance still reaches. There is one: the width is above 0 at distance 0, and
 * its square grows at most linearly.
 * @param furthest  no width is larger
 */
function endAt(widthAt: (distance: number) => number, furthest: number): number {
  let reached = 0;
  let missed = furthest * (1 + 1e-9);
  for (let step = 0; step < 50; step++) {
    const middle = (reached + missed) / 2;
    if (middle <= widthAt(middle)) reached = middle;
    else missed = middle;
  }
  return reached;
}

/** What each unit's code length differs from its share of the whole, bits; only units that hold positions. */
function unitResiduals({ blockBits, blockPositions }: OrderCounts): Float64Array {
  let bits = 0;
  let positions = 0;
  for (let b = 0; b < blockBits.length; b++) {
    bits += blockBits[b];
    positions += blockPositions[b];
  }
  const rate = positions === 0 ? 0 : bits / positions;
  return blockBits
    .map((value, b) => value - rate * blockPositions[b])
    .filter((_, b) => blockPositions[b] > 0);
}

/**
 * The entropy per symbol that may still be there when none of `positions` symbols differed from what its context foretold:
 * of the share of others that would have stayed unseen in one case of forty.
 * Source: Clopper & Pearson, "The use of confidence or fiducial limits", 1934 (none seen).
 */
function unseenBits(positions: number, alphabetSize: number): number {
  if (alphabetSize < 2) return 0;
  const others = Math.min(1 - 1 / alphabetSize, 1 - ((1 - LEVEL) / 2) ** (1 / positions));
  return (
    others * Math.log2((alphabetSize - 1) / others) -
    (1 - others) * (Math.log1p(-others) / Math.LN2)
  );
}

/**
 * By how many bits per symbol an entropy with its Miller–Madow term is still low because of rare pairs, about.
 *
 * A pair expected λ times in a long row adds λ log λ − E[x log x] + P(x > 0)/2 to the error of the sum, x being Poisson.
 * Where the number of pairs falls with λ by a power law, as tails do, the number seen twice for each one seen once tells
 * the power (Good 1953 for the expected numbers), and the error summed over all λ is
 * −({@link ONCE_BITS} + {@link ONCE_BITS_BY_RATIO} ÷ that ratio) bits for each one seen once, to 4 % for ratios from 0.2 to
 * 0.75. Contexts seen once have the same effect with the other sign.
 */
export function rareBits({ positions, contextTallies, pairTallies }: OrderCounts): number {
  if (positions === 0) return 0;
  return Math.max(0, rareSum(pairTallies) - rareSum(contextTallies)) / positions;
}

const ONCE_BITS = 0.4;
const ONCE_BITS_BY_RATIO = 0.62;

function rareSum(tallies: Tallies): number {
  const once = timesOf(tallies, 1);
  if (once === 0) return 0;
  const ratio = Math.min(1, Math.max(0.2, timesOf(tallies, 2) / once));
  return once * (ONCE_BITS + ONCE_BITS_BY_RATIO / ratio);
}

function timesOf({ values, times }: Tallies, count: number): number {
  const at = values.subarray(0, count).indexOf(count);
  return at < 0 ? 0 : times[at];
}
