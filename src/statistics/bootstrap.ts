import { InputError } from '../errors/errors.ts';
import { SeededGenerator } from './generator.ts';
import { quantileOfSorted } from './quantiles.ts';

/** Both ends of an interval. */
export interface Interval {
  readonly low: number;
  readonly high: number;
}

/** How an interval is drawn by resampling. */
export interface Resampling {
  readonly seed: number | string;
  /** Resamples; 1 or more. */
  readonly repetitions: number;
  /** Share of resamples inside the interval; 0.95 when absent. */
  readonly level?: number;
}

/**
 * The middle `level` of a statistic over resamples. Sorts `statistics` in place.
 * Source: Efron & Tibshirani, "An Introduction to the Bootstrap", 1993, §13.3 (percentile interval).
 */
export function percentileInterval(statistics: Float64Array, level: number): Interval {
  if (!(level > 0 && level < 1)) {
    throw new InputError('the level of an interval must lie between 0 and 1', {
      got: String(level),
    });
  }
  statistics.sort();
  return {
    low: quantileOfSorted(statistics, (1 - level) / 2),
    high: quantileOfSorted(statistics, (1 + level) / 2),
  };
}

/** Room for the statistic of each resample. Throws InputError unless there is at least one. */
export function resampleRoom(repetitions: number): Float64Array {
  if (!Number.isSafeInteger(repetitions) || repetitions < 1) {
    throw new InputError('a bootstrap needs at least one resample', { got: String(repetitions) });
  }
  return new Float64Array(repetitions);
}

/**
 * Percentile interval of a mean, by resampling the values with replacement.
 *
 * @param values  shape [n], n ≥ 1, independent of one another; the interval is too narrow below about 20 values
 * @throws InputError for no values or an impossible resampling
 * Cost: n · repetitions draws; nothing is allocated per draw.
 * Source: Efron & Tibshirani 1993, §13.3.
 */
export function bootstrapMean(values: Float64Array, resampling: Resampling): Interval {
  const { length } = values;
  if (length === 0) throw new InputError('a mean needs at least one value');
  const generator = new SeededGenerator(resampling.seed);
  const means = resampleRoom(resampling.repetitions);
  for (let r = 0; r < means.length; r++) {
    let sum = 0;
    for (let i = 0; i < length; i++) sum += values[generator.integer(0, length - 1)];
    means[r] = sum / length;
  }
  return percentileInterval(means, resampling.level ?? 0.95);
}
