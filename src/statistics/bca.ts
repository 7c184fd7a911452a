import { InputError } from '../errors/errors.ts';
import { type Interval, type Resampling, resampleRoom } from './bootstrap.ts';
import { SeededGenerator } from './generator.ts';
import { normalQuantile, normalShareBelow } from './normal-law.ts';
import { quantileOfSorted } from './quantiles.ts';

/**
 * The bias-corrected and accelerated interval of a statistic: a percentile interval at levels moved by how far the resamples
 * lie to one side of the estimate (z₀), and by how fast the standard error grows with the statistic (a, by the jackknife).
 * Sorts `statistics` in place.
 *
 * Not for entropies: their resamples are biased themselves, which z₀ would take for skewness.
 * @param statistics  shape [B], B ≥ 1: of each resample
 * @param estimate    of the data
 * @param jackknife   shape [n], n ≥ 2: of the data without each value in turn
 * @throws InputError for no resamples, fewer than two jackknife values, or a level outside 0 … 1
 * Source: Efron, "Better bootstrap confidence intervals", 1987; Efron & Tibshirani 1993, §14.3.
 */
export function bcaInterval(
  statistics: Float64Array,
  estimate: number,
  jackknife: Float64Array,
  level: number,
): Interval {
  if (statistics.length === 0 || jackknife.length < 2 || !(level > 0 && level < 1)) {
    throw new InputError('this interval cannot be drawn', {
      expected: 'resamples, two values or more, and a level between 0 and 1',
      got: `${statistics.length} resamples, ${jackknife.length} values, level ${level}`,
    });
  }
  statistics.sort();
  const count = statistics.length;
  let below = 0;
  let equal = 0;
  for (const statistic of statistics) {
    if (statistic < estimate) below++;
    else if (statistic === estimate) equal++;
  }
  // All resamples on one side would move the levels without end: half a resample is the least that can be told.
  const share = Math.min(1 - 0.5 / count, Math.max(0.5 / count, (below + equal / 2) / count));
  const bias = normalQuantile(share);
  const acceleration = accelerationOf(jackknife);
  const at = (z: number): number => {
    const moved = bias + z;
    const room = 1 - acceleration * moved;
    const share = room > 0 ? normalShareBelow(bias + moved / room) : moved > 0 ? 1 : 0;
    return quantileOfSorted(statistics, share);
  };
  const z = normalQuantile((1 + level) / 2);
  return { low: at(-z), high: at(z) };
}

/** A sixth of the skewness of the jackknife's influence; 0 where nothing differs. */
function accelerationOf(jackknife: Float64Array): number {
  let mean = 0;
  for (const value of jackknife) mean += value;
  mean /= jackknife.length;
  let squares = 0;
  let cubes = 0;
  for (const value of jackknife) {
    squares += (mean - value) ** 2;
    cubes += (mean - value) ** 3;
  }
  return squares === 0 ? 0 : cubes / (6 * squares ** 1.5);
}

/**
 * The bias-corrected and accelerated interval of a mean, by resampling the values with replacement: for means over
 * messages, whose lengths are skewed.
 *
 * @param values  shape [n], n ≥ 2, independent of one another
 * @throws InputError for fewer than two values or an impossible resampling
 * Cost: n · repetitions draws; nothing is allocated per draw.
 */
export function bcaMean(values: Float64Array, resampling: Resampling): Interval {
  const { length } = values;
  const generator = new SeededGenerator(resampling.seed);
  const means = resampleRoom(resampling.repetitions);
  let total = 0;
  for (let i = 0; i < length; i++) total += values[i];
  const jackknife = values.map((value) => (total - value) / (length - 1));
  for (let r = 0; r < means.length && length > 0; r++) {
    let sum = 0;
    for (let i = 0; i < length; i++) sum += values[generator.integer(0, length - 1)];
    means[r] = sum / length;
  }
  return bcaInterval(means, total / length, jackknife, resampling.level ?? 0.95);
}
