import { SeededGenerator } from '../statistics/generator.ts';
import { quantileOfSorted } from '../statistics/quantiles.ts';
import { type Clock, type SampleRule, type TimedTask, takeSample } from './time-sampler.ts';

/** A round is steady while the pacer's 95th percentile stays within this multiple of its median. */
export const STEADY_SPREAD = 1.15;

export interface RoundRule extends SampleRule {
  /** Turns of a round. */
  readonly repeats: number;
  /** Turns in which side tasks take part: the first so many. */
  readonly sideTurns: number;
  /** A sample of a side task, and the pacer's warming up, last at least so long. */
  readonly shortestSideSeconds: number;
  /** Turns that even the slowest tasks get, where `repeats` asks for as many. */
  readonly leastTurns: number;
  /** A round that is not steady is done again until there were so many. */
  readonly mostRounds: number;
  /** After so long no turn starts beyond `leastTurns`, and no further round starts that would pass it. */
  readonly seconds: number;
  /** Draws the order of the tasks within each turn. */
  readonly seed: number | string;
}

/** The round that is kept: the first steady one, else the steadiest. */
export interface Round {
  /** Samples of pacer and candidate, mean seconds of a run, in time order; entry i of both comes from turn i. */
  readonly pacer: readonly number[];
  readonly candidate: readonly number[];
  /** The same for each side task, which has fewer turns or as many. */
  readonly sides: readonly (readonly number[])[];
  /** Rounds that were done, this one included. */
  readonly rounds: number;
  /** 95th percentile of the pacer's samples by their median. */
  readonly spread: number;
  readonly unsteady: boolean;
}

/** 95th percentile by median. */
export function spreadOf(seconds: readonly number[]): number {
  const sorted = Float64Array.from(seconds).sort();
  return quantileOfSorted(sorted, 0.95) / quantileOfSorted(sorted, 0.5);
}

/**
 * Times tasks in turns: each turn takes one sample of every task, in an order drawn anew, so that whatever slows the machine
 * for a while slows them alike, and none always follows the same other. Before the first round pacer and candidate are warmed
 * up by a sample that is not kept; side tasks must have run before, and mostly do again what the candidate does.
 *
 * @param sides  timed for themselves beside the candidate, in fewer turns
 */
export function timeRounds(
  pacer: TimedTask,
  candidate: TimedTask,
  sides: readonly TimedTask[],
  rule: RoundRule,
  clock: Clock,
): Round {
  const generator = new SeededGenerator(rule.seed);
  const tasks = [pacer, candidate, ...sides];
  const sideRule = { ...rule, shortestSeconds: rule.shortestSideSeconds };
  const began = clock();
  takeSample(candidate, rule, clock);
  takeSample(pacer, sideRule, clock);
  let best: { seconds: number[][]; spread: number } | undefined;
  let rounds = 0;
  for (;;) {
    const roundBegan = clock();
    const seconds: number[][] = tasks.map(() => []);
    for (let turn = 0; turn < rule.repeats; turn++) {
      if (turn >= rule.leastTurns && clock() - began >= rule.seconds) break;
      const order = shuffled(turn < rule.sideTurns ? tasks.length : 2, generator);
      for (const i of order) seconds[i].push(takeSample(tasks[i], i < 2 ? rule : sideRule, clock));
    }
    rounds++;
    const spread = spreadOf(seconds[0]);
    if (best === undefined || spread < best.spread) best = { seconds, spread };
    const now = clock();
    const hasRoom = now - began + (now - roundBegan) <= rule.seconds;
    if (best.spread <= STEADY_SPREAD || rounds >= rule.mostRounds || !hasRoom) break;
  }
  const [paced, own, ...rest] = best.seconds;
  return {
    pacer: paced,
    candidate: own,
    sides: rest,
    rounds,
    spread: best.spread,
    unsteady: best.spread > STEADY_SPREAD,
  };
}

/** 0 … count − 1 in an order of which each is equally likely. Source: R. A. Fisher, F. Yates 1938; R. Durstenfeld 1964. */
function shuffled(count: number, generator: SeededGenerator): number[] {
  const order = Array.from({ length: count }, (_, i) => i);
  for (let i = count - 1; i > 0; i--) {
    const j = generator.integer(0, i);
    [order[i], order[j]] = [order[j], order[i]];
  }
  return order;
}
