import type { Interval } from './bootstrap.ts';
import { shiftInterval } from './shift-interval.ts';

/** Samples of one side, in time order, each with the pacer's of the same turn. */
export interface PacedSamples {
  /** Seconds of a run; the same for every turn. */
  readonly seconds: readonly number[];
  /** Seconds of the pacer in the same turn: as many. */
  readonly pacerSeconds: readonly number[];
  /** The pacer itself did not run evenly. */
  readonly unsteady: boolean;
}

/**
 * `slower`, `faster`: the whole interval lies beyond what is allowed. `alike`: it lies within. `undecided`: it reaches across a
 * limit.
 */
export type SpeedVerdict = 'slower' | 'faster' | 'alike' | 'undecided';

export interface SpeedComparison extends Interval {
  /** Speed of the first by speed of the second: 1.10 where the second takes 10 % longer. */
  readonly ratio: number;
  readonly verdict: SpeedVerdict;
  /** One side or both were timed on an uneven machine. Who lets a build fail by time should then time again first. */
  readonly unsteady: boolean;
}

/** What a verdict asks for, unless said otherwise. */
const VERDICT_LEVEL = 0.99;
const ALLOWED_RATIO = 1.03;

/**
 * Whether the second is slower than the first. Each sample counts as its multiple of the pacer in the same turn, so that what
 * slows the machine for longer than a turn cancels; the logarithms of those are compared as two samples that differ by a shift.
 *
 * The rank-sum interval, and no bootstrap of two medians: of 5 samples a 99 % percentile bootstrap misses in 1.5 % of simulated
 * cases instead of 1 %, and of 20 it is a sixth wider, so that it would see less. On an uneven machine the interval is wide, and
 * still holds: it supposes nothing of the noise but that it is the same for both.
 * @throws InputError for no samples
 * Source: {@link shiftInterval}.
 */
export function compareSpeeds(
  first: PacedSamples,
  second: PacedSamples,
  { level = VERDICT_LEVEL, allowed = ALLOWED_RATIO } = {},
): SpeedComparison {
  const { shift, low, high } = shiftInterval(logMultiples(first), logMultiples(second), level);
  const limit = Math.log(allowed);
  let verdict: SpeedVerdict = 'undecided';
  if (low > limit) verdict = 'slower';
  else if (high < -limit) verdict = 'faster';
  else if (low >= -limit && high <= limit) verdict = 'alike';
  return {
    ratio: Math.exp(shift),
    low: Math.exp(low),
    high: Math.exp(high),
    verdict,
    unsteady: first.unsteady || second.unsteady,
  };
}

function logMultiples({ seconds, pacerSeconds }: PacedSamples): number[] {
  return seconds.map((own, i) => Math.log(own / pacerSeconds[i]));
}
