import { medianInterval } from '../statistics/median-interval.ts';
import { median, quantileOfSorted } from '../statistics/quantiles.ts';
import type { Cell } from './cells.ts';
import type { CorpusData } from './corpus-data.ts';
import { setupOf } from './run-cell.ts';
import { Pacer } from './time-pacer.ts';
import { leadingPart } from './time-part.ts';
import { type Round, type RoundRule, timeRounds } from './time-rounds.ts';
import { type Clock, type TimedTask, takeSample, threadClock } from './time-sampler.ts';
import { type CellWork, cellWork, type EndTasks } from './time-work.ts';

/** How a plan asks for times. Plain data, so that it can be handed to another thread. */
export interface TimingOptions {
  /** Samples of each end. */
  readonly repeats: number;
  /** The candidate that speeds are multiples of; deflate-huffman when absent. */
  readonly pacer?: string;
}

/** The pacer unless a plan names another. */
const STANDARD_PACER = 'deflate-huffman';

/** A time, as the number of symbols that the pacer codes at the same end in that time. */
export interface PacedTime {
  /** Median of the samples. */
  readonly seconds: number;
  readonly pacerSymbols: number;
  /** 95 % interval of `pacerSymbols`. */
  readonly low: number;
  readonly high: number;
}

/** What one end of a cell was timed at. All samples are mean seconds of a run over the timed part, in time order. */
export interface EndTimes {
  readonly seconds: readonly number[];
  /** The pacer's in the same turns. */
  readonly pacerSeconds: readonly number[];
  readonly median: number;
  readonly p95: number;
  /** Median of pacer time ÷ own time, turn by turn; above 1 is faster. */
  readonly speed: number;
  /** 95 % interval of `speed`. */
  readonly low: number;
  readonly high: number;
  /** Rounds that were timed; the steadiest is kept. */
  readonly rounds: number;
  /** The pacer was uneven in all of them. */
  readonly unsteady: boolean;
  /** Making a new end ready before its first message. */
  readonly setUp?: PacedTime;
  /** What a message costs beyond its symbols: against the same symbols as one message. May be negative. */
  readonly perMessage?: PacedTime;
}

/** The times of one cell. */
export interface CellTimes {
  readonly pacer: string;
  /** Symbols and messages of the test part that were timed: its beginning. */
  readonly symbolCount: number;
  readonly messageCount: number;
  readonly encode: EndTimes;
  readonly decode: EndTimes;
  /** Making the tables: from the train part, or, where they are sent, from what is coded. By the pacer's encoder. */
  readonly buildTables?: PacedTime;
}

/** Samples last at least so long, and end after ten times that, what is made ready counted. Side samples are shorter. */
const SAMPLE = { shortestSeconds: 0.02, longestSeconds: 0.2, shortestSideSeconds: 0.005 };
/** Fewest turns of the slowest cells. */
const LEAST_TURNS = 3;
const MOST_ROUNDS = 3;
/** Turns in which set-up and joined messages are timed too: the fewest that give a median a 95 % interval. */
const SIDE_TURNS = 6;
/** No more of the test part is timed than this, and less of it where a run would take longer than {@link SLOW_RUN_SECONDS}. */
const MOST_SYMBOLS = 2 ** 20;
const LEAST_SYMBOLS = 2 ** 14;
const SLOW_RUN_SECONDS = 0.05;
const RESAMPLES = 1000;

/** Longest that one end is timed for, unless its {@link LEAST_TURNS} take longer. */
export function longestEndSeconds(repeats: number): number {
  return 0.2 + 0.1 * repeats;
}

/**
 * Times a cell: alone on this thread and from nothing, so that it can run wherever its corpus is at hand. Tables are made, the
 * timed part is coded once and verified, then each end is timed in turns with the pacer (see {@link timeRounds}).
 *
 * How long it takes: twice {@link longestEndSeconds}, and what training and coding the part once take; where a run is slower
 * than a sample, at least four runs of each end.
 * @returns undefined where there is nothing to time
 * @throws what the coder throws; InputError for a pacer that cannot code these symbols
 */
export function timeCell(
  cell: Cell,
  corpus: CorpusData,
  options: TimingOptions,
  clock: Clock = threadClock,
): CellTimes | undefined {
  if (corpus.test.symbols.length === 0) return undefined;
  const { part, work } = readyWork(cell, corpus, clock);
  const pacer = options.pacer ?? STANDARD_PACER;
  const paced = new Pacer(pacer, part.test);
  const symbolCount = part.test.symbols.length;
  const rule = (end: string): RoundRule => ({
    ...SAMPLE,
    repeats: options.repeats,
    sideTurns: SIDE_TURNS,
    leastTurns: LEAST_TURNS,
    mostRounds: MOST_ROUNDS,
    seconds: longestEndSeconds(options.repeats),
    seed: `${cell.id} ${end}`,
  });
  const timeEnd = (end: 'encode' | 'decode'): EndTimes =>
    endTimes(work[end], paced[end], work.messagesApart, symbolCount, rule(end), clock);
  return {
    pacer,
    symbolCount,
    messageCount: part.test.messageEnds.length,
    encode: timeEnd('encode'),
    decode: timeEnd('decode'),
    ...(work.buildTables === undefined
      ? {}
      : { buildTables: buildTime(work.buildTables, paced.encode, symbolCount, rule, clock) }),
  };
}

/** The part that is timed, ready; smaller by powers of 4 than the bounds say where the coder is slow. */
function readyWork(
  cell: Cell,
  corpus: CorpusData,
  clock: Clock,
): { part: CorpusData; work: CellWork } {
  const trained = cell.policy === 'sent' ? undefined : setupOf(cell, corpus);
  const ready = (mostSymbols: number) => {
    const shared = leadingPart(corpus, mostSymbols);
    // Symbols may lie in memory shared between threads, where a product would have its own.
    const part = { ...shared, test: { ...shared.test, symbols: shared.test.symbols.slice() } };
    return { part, work: cellWork(cell, part, trained) };
  };
  const least = ready(LEAST_SYMBOLS);
  const leastCount = least.part.test.symbols.length;
  if (leastCount === corpus.test.symbols.length) return least;
  const once = { shortestSeconds: 0, longestSeconds: 0 };
  const seconds = Math.max(
    takeSample(least.work.encode.code, once, clock),
    takeSample(least.work.decode.code, once, clock),
  );
  let mostSymbols = MOST_SYMBOLS;
  while (mostSymbols > LEAST_SYMBOLS && (mostSymbols * seconds) / leastCount > SLOW_RUN_SECONDS)
    mostSymbols /= 4;
  return mostSymbols <= LEAST_SYMBOLS ? least : ready(mostSymbols);
}

function endTimes(
  tasks: EndTasks,
  pacer: TimedTask,
  messagesApart: number,
  symbolCount: number,
  rule: RoundRule,
  clock: Clock,
): EndTimes {
  const { code, setUp, joined } = tasks;
  const sides = [setUp, joined].filter((task) => task !== undefined);
  const round = timeRounds(pacer, code, sides, rule, clock);
  const { candidate } = round;
  const { seed } = rule;
  const speed = medianInterval(
    candidate.map((own, i) => round.pacer[i] / own),
    { seed, repetitions: RESAMPLES },
  );
  const setUpSeconds = setUp === undefined ? undefined : round.sides[0];
  const joinedSeconds = joined === undefined ? undefined : round.sides[sides.length - 1];
  return {
    seconds: candidate,
    pacerSeconds: round.pacer,
    median: median(candidate),
    p95: quantileOfSorted(Float64Array.from(candidate).sort(), 0.95),
    speed: speed.median,
    low: speed.low,
    high: speed.high,
    rounds: round.rounds,
    unsteady: round.unsteady,
    ...(setUpSeconds === undefined
      ? {}
      : { setUp: pacedTime(setUpSeconds, round, symbolCount, seed) }),
    ...(joinedSeconds === undefined
      ? {}
      : {
          perMessage: pacedTime(
            joinedSeconds.map((whole, i) => (candidate[i] - whole) / messagesApart),
            round,
            symbolCount,
            seed,
          ),
        }),
  };
}

function pacedTime(
  seconds: readonly number[],
  { pacer }: Round,
  symbolCount: number,
  seed: number | string,
): PacedTime {
  const inSymbols = medianInterval(
    seconds.map((own, i) => (own * symbolCount) / pacer[i]),
    { seed, repetitions: RESAMPLES },
  );
  return {
    seconds: median(seconds),
    pacerSymbols: inSymbols.median,
    low: inSymbols.low,
    high: inSymbols.high,
  };
}

/** Training can take longer than all else, so that it gets one turn where it does. */
function buildTime(
  build: TimedTask,
  pacer: TimedTask,
  symbolCount: number,
  ruleOf: (end: string) => RoundRule,
  clock: Clock,
): PacedTime {
  const rule: RoundRule = {
    ...ruleOf('tables'),
    shortestSeconds: SAMPLE.shortestSideSeconds,
    repeats: SIDE_TURNS,
    leastTurns: 1,
    mostRounds: 1,
    seconds: 0.1,
  };
  const round = timeRounds(pacer, build, [], rule, clock);
  return pacedTime(round.candidate, round, symbolCount, rule.seed);
}
