import type { ContextScope } from '../models/context-counts.ts';
import { ratioStandardError } from '../statistics/ratio-error.ts';
import type { SymbolSequence } from '../symbols/sequence.ts';
import {
  countByWindow,
  type SegmentLength,
  segmentLengths,
  type WindowCounts,
  windowStart,
} from './drift-counts.ts';
import { FEWEST_WINDOWS, type SwitchTest, testSides, testSwitch } from './drift-switch.ts';
import { judgeEstimable } from './estimable.ts';
import { millerMadowTerm } from './miller-madow.ts';

/** Windows that are compared; two neighbours together are one of those shown. */
const MOST_WINDOWS = 64;
/** Fewest symbols of a window that is compared. */
const WINDOW_SYMBOLS = 64;

/** Rates of one contiguous window, in bits per symbol. */
export interface WindowRate {
  readonly fromSymbol: number;
  readonly toSymbol: number;
  /** Corrected entropy of the window by itself: an estimate. */
  readonly own: number;
  /** What its symbols cost under the frequencies of all data. */
  readonly underAll: number;
}

/** One order's test for a change. */
export interface DriftTest {
  readonly order: number;
  /** Undefined: not tested. */
  readonly found: boolean | undefined;
  /** What was found, or why nothing was tested; half a sentence. */
  readonly reason: string;
}

/** The change that explains the data best, where one was found. Rates in bits per symbol. */
export interface FoundSwitch {
  readonly order: number;
  /** First symbol after the change, to within one window. */
  readonly atSymbol: number;
  readonly windowSymbols: number;
  /** One side changes again, or gradually. */
  readonly further: boolean;
  /** Absent where a side holds too little to state its entropy at this order. */
  readonly rates?: {
    /** Corrected entropies of the two sides. */
    readonly before: number;
    readonly after: number;
    /** What one table for both sides costs beyond a table for each, less what a second table merely memorises. */
    readonly oneTableCost: number;
  };
}

export interface Drift {
  /** Shape [2]: orders 0 and 1. */
  readonly tests: readonly DriftTest[];
  readonly change?: FoundSwitch;
  /** Windows at the highest order that each of them suffices for; absent where none does. */
  readonly windows?: {
    readonly order: number;
    readonly rates: readonly WindowRate[];
    /** What one table costs beyond a table for each window, and its standard error over windows. */
    readonly oneTableCost: number;
    readonly standardError: number;
  };
}

export interface DriftOptions {
  readonly contexts: ContextScope;
  /** Of the random reorderings; 1 when absent. */
  readonly seed?: number | string;
}

/**
 * Whether and how the source changes along the data, by orders 0 and 1: a change that leaves both as they are is not seen.
 *
 * Cost: two passes over the symbols, and about a second where the alphabet is large; at most 64 MiB.
 */
export function driftOf(sequence: SymbolSequence, options: DriftOptions): Drift {
  const { seed = 1, contexts } = options;
  const { length } = sequence.symbols;
  const fitting = Math.min(MOST_WINDOWS, Math.floor(length / WINDOW_SYMBOLS));
  const windows = fitting - (fitting % 2);
  if (windows < FEWEST_WINDOWS) {
    const reason = `not tested: at least ${FEWEST_WINDOWS * WINDOW_SYMBOLS} symbols are needed`;
    return { tests: [0, 1].map((order) => ({ order, found: undefined, reason })) };
  }
  const tests: DriftTest[] = [];
  let change: FoundSwitch | undefined;
  let shown: Drift['windows'];
  for (const order of [0, 1] as const) {
    const counts = countByWindow(sequence, order, windows, contexts);
    if (typeof counts === 'string') {
      tests.push({ order, found: undefined, reason: `not tested: ${counts}` });
      continue;
    }
    const test = testSwitch(counts, `${seed}/${order}`);
    tests.push({ order, found: test.found, reason: reasonOf(test) });
    if (test.found) {
      const found = describeSwitch(counts, test.boundary, length, seed);
      if (change === undefined || found.rates !== undefined) change = found;
    }
    shown = windowRates(counts, length) ?? shown;
  }
  return {
    tests,
    ...(change === undefined ? {} : { change }),
    ...(shown === undefined ? {} : { windows: shown }),
  };
}

function reasonOf({ found, share }: SwitchTest): string {
  const percent = `${Number((share * 100).toPrecision(2))} %`;
  return found
    ? `at most ${percent} of random orders of the windows part as well`
    : `${percent} of random orders of the windows part as well or better`;
}

/** Whether the segment holds enough to state its entropy. */
function suffices(segment: SegmentLength): boolean {
  const { positions, ownBits } = segment;
  const entropyBits = positions === 0 ? 0 : ownBits / positions;
  return judgeEstimable({ ...segment, entropyBits }).estimable;
}

function correctedRate(length: SegmentLength): number {
  if (length.positions === 0) return 0;
  return length.ownBits / length.positions + millerMadowTerm(length);
}

/** What one table costs beyond a table for each segment, in bits, less what separate tables save where nothing changes. */
function oneTableBits(counts: WindowCounts, segments: readonly SegmentLength[]): number {
  let saved = 0;
  let free = counts.contexts - counts.pairs;
  for (const segment of segments) {
    saved += segment.underAllBits - segment.ownBits;
    free += segment.pairs - segment.contexts;
  }
  return saved - free / (2 * Math.LN2);
}

function describeSwitch(
  counts: WindowCounts,
  boundary: number,
  symbolCount: number,
  seed: number | string,
): FoundSwitch {
  const { windows, order } = counts;
  const segments = segmentLengths(counts, [0, boundary, windows]);
  return {
    order,
    atSymbol: windowStart(symbolCount, windows, boundary),
    windowSymbols: Math.ceil(symbolCount / windows),
    further: testSides(counts, boundary, `${seed}/${order}`).some((side) => side?.found === true),
    ...(segments.every(suffices)
      ? {
          rates: {
            before: correctedRate(segments[0]),
            after: correctedRate(segments[1]),
            oneTableCost:
              oneTableBits(counts, segments) / (segments[0].positions + segments[1].positions),
          },
        }
      : {}),
  };
}

/** Undefined where some window holds too little to state its entropy. */
function windowRates(counts: WindowCounts, symbolCount: number): Drift['windows'] {
  const shown = counts.windows / 2;
  const bounds = Array.from({ length: shown + 1 }, (_, w) => 2 * w);
  const segments = segmentLengths(counts, bounds);
  if (!segments.every(suffices)) return undefined;
  const positions = Float64Array.from(segments, (s) => s.positions);
  const excess = Float64Array.from(
    segments,
    (s) => s.underAllBits - s.ownBits - (s.pairs - s.contexts) / (2 * Math.LN2),
  );
  const total = positions.reduce((sum, n) => sum + n, 0);
  return {
    order: counts.order,
    rates: segments.map((segment, w) => ({
      fromSymbol: windowStart(symbolCount, shown, w),
      toSymbol: windowStart(symbolCount, shown, w + 1),
      own: correctedRate(segment),
      underAll: segment.underAllBits / segment.positions,
    })),
    oneTableCost: oneTableBits(counts, segments) / total,
    standardError: ratioStandardError(excess, positions) ?? 0,
  };
}
