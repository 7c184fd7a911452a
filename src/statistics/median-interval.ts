import { InputError } from '../errors/errors.ts';
import { type Interval, percentileInterval, type Resampling, resampleRoom } from './bootstrap.ts';
import { SeededGenerator } from './generator.ts';
import { normalShareBelow, studentQuantile } from './normal-law.ts';
import { median, quantileOfSorted } from './quantiles.ts';

/** A median with its interval. */
export interface MedianInterval extends Interval {
  readonly median: number;
}

/** Fewest values whose least and largest hold their median between them with probability `level`. */
export function leastValuesForMedian(level: number): number {
  return Math.ceil(1 - Math.log2(1 - level));
}

/**
 * The median of values in any order, with a percentile interval by resampling them, expanded for small samples: resamples of n
 * values spread too little by √((n − 1)/n), and a normal tail is too thin for so few, so that the percentiles are taken
 * further out, at Φ(∓√(n/(n − 1)) · t). Below {@link leastValuesForMedian} values the interval cannot keep its promise,
 * however it is drawn: it is then at most the span of the values.
 *
 * @param values  shape [n], n ≥ 1, independent of one another; one value has no width
 * @throws InputError for no values, or an impossible resampling
 * Cost: repetitions draws and sorts of n values; nothing is allocated per draw.
 * Source: Efron & Tibshirani 1993, §13.3; T. C. Hesterberg, "What teachers should know about the bootstrap", The American
 * Statistician 69(4), 2015 (expanded percentile interval).
 */
export function medianInterval(values: readonly number[], resampling: Resampling): MedianInterval {
  const { length } = values;
  if (length === 0) throw new InputError('a median needs at least one value');
  const middle = median(values);
  if (length === 1) return { median: middle, low: middle, high: middle };
  const level = resampling.level ?? 0.95;
  const generator = new SeededGenerator(resampling.seed);
  const medians = resampleRoom(resampling.repetitions);
  const draw = new Float64Array(length);
  for (let r = 0; r < medians.length; r++) {
    for (let i = 0; i < length; i++) draw[i] = values[generator.integer(0, length - 1)];
    medians[r] = quantileOfSorted(draw.sort(), 0.5);
  }
  const reach = Math.sqrt(length / (length - 1)) * studentQuantile((1 + level) / 2, length - 1);
  // For two or three values the percentiles lie further out than a number can say: at the ends.
  const expanded = Math.min(1 - Number.EPSILON, 2 * normalShareBelow(reach) - 1);
  return { median: middle, ...percentileInterval(medians, expanded) };
}
