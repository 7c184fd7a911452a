import type { CalibrationVerdict, IntervalLine } from './calibrate-record.ts';

/** Least share of trusted 95 % intervals that must hold the truth. */
const LEAST_COVERAGE = 0.85;
/** Most of them that may, where an interval has no reason to be wider than it says. */
const MOST_COVERAGE = 0.99;
/** Fewest repetitions that tell 99 % from 100 %. */
const FEWEST_FOR_MOST = 200;
/** False alarms allowed, as a share of runs; and how improbable under it a count must be to be held against it. */
const FALSE_ALARMS = 0.01;
const TOO_MANY = 0.001;
/** Bits by which a decodable code may beat the content of what it coded: chance does that once in 2^30. */
const LUCK_BITS = 30;

export interface Judged {
  readonly verdict: CalibrationVerdict;
  /** What was found; half a sentence. */
  readonly verdict_text: string;
}

const holds = (verdict_text: string): Judged => ({ verdict: 'holds', verdict_text });
const misses = (verdict_text: string): Judged => ({ verdict: 'misses', verdict_text });
const flagged = (verdict_text: string): Judged => ({ verdict: 'flagged beforehand', verdict_text });

const percent = (share: number): string => `${Number((share * 100).toFixed(1))} %`;

/** What a line of intervals is judged by, besides its counts. */
export interface IntervalQuestion
  extends Pick<
    IntervalLine,
    'repetitions' | 'trusted' | 'held' | 'bias' | 'half_width' | 'against_order'
  > {
  /** Why untrusted ones were not trusted, the most frequent reason. */
  readonly reason: string;
  /** The truth lies where intervals are cut, so that they hold it more often than they say: 0, or the most there is. */
  readonly atEdge: boolean;
}

/**
 * Whether trusted intervals kept their promise: they hold the truth in 85 % of runs or more; and, over 200 runs or more from
 * the source's own order on, in 99 % or less. Where fewer than half of the runs are trusted, which ones are is chance that
 * moves the figure too, and the line counts as flagged, unless trusted intervals missed in more than 15 % of all runs. A
 * single run cannot be counted: the truth must lie within two half-widths, which is four standard errors.
 */
export function judgeIntervals(question: IntervalQuestion): Judged {
  const { repetitions, trusted, held, reason, atEdge } = question;
  const missed = trusted - held;
  if (trusted === 0) return flagged(reason);
  if (repetitions === 1) {
    if (held === 1) return holds('one run');
    return Math.abs(question.bias) <= 2 * question.half_width
      ? holds('one run, within two half-widths')
      : misses('off by more than two half-widths');
  }
  if (trusted < repetitions / 2) {
    return missed > (1 - LEAST_COVERAGE) * repetitions
      ? misses(`${missed} of ${repetitions} runs`)
      : flagged(`${repetitions - trusted} of ${repetitions} runs: ${reason}`);
  }
  const coverage = held / trusted;
  if (coverage < LEAST_COVERAGE) return misses(`holds in ${percent(coverage)}, 85 % is promised`);
  const own = question.against_order === 'own' || question.against_order === 'above';
  if (own && !atEdge && trusted >= FEWEST_FOR_MOST && coverage > MOST_COVERAGE) {
    return misses(`holds in ${percent(coverage)}, too wide`);
  }
  return holds(`holds in ${percent(coverage)}`);
}

/**
 * Whether a coder's carried bits are possible at all: whatever can be decoded cannot be shorter than −log2 of the
 * probability of what was coded by b bits more often than once in 2^b.
 * Source: Cover & Thomas, "Elements of Information Theory", 2nd ed. 2006, theorem 5.11.1 (after Barron 1985).
 */
export function judgeCoder(carriedBits: number, ownContentBits: number): Judged {
  const short = ownContentBits - carriedBits;
  return short > LUCK_BITS
    ? misses(`${Math.round(short)} bits less than these symbols contain`)
    : holds('decoded, and no less than these symbols contain');
}

/**
 * Whether a change was found in 19 of 20 runs or more; where there is none, whether so many reports of one are too many for
 * one false alarm in a hundred runs.
 */
export function judgeChange(changes: boolean, found: number, repetitions: number): Judged {
  const text = `${found} of ${repetitions}`;
  if (changes) return found >= 0.95 * repetitions ? holds(text) : misses(`only ${text}`);
  return shareOfSoMany(found, repetitions, FALSE_ALARMS) >= TOO_MANY
    ? holds(text)
    : misses(`${text} where nothing changes`);
}

/** The probability of `count` or more successes in `runs`, each with probability `share` strictly between 0 and 1. */
export function shareOfSoMany(count: number, runs: number, share: number): number {
  let exactly = (1 - share) ** runs;
  let fewer = 0;
  for (let i = 0; i < count; i++) {
    fewer += exactly;
    exactly *= ((runs - i) * share) / ((i + 1) * (1 - share));
  }
  return 1 - fewer;
}
