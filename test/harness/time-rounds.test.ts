import { describe, expect, test } from 'vitest';
import {
  type RoundRule,
  STEADY_SPREAD,
  spreadOf,
  timeRounds,
} from '../../src/harness/time-rounds.ts';

const RULE: RoundRule = {
  repeats: 10,
  sideTurns: 4,
  shortestSideSeconds: 0.02,
  leastTurns: 3,
  mostRounds: 3,
  shortestSeconds: 0.02,
  longestSeconds: 0.2,
  seconds: Number.POSITIVE_INFINITY,
  seed: 7,
};

/** Tasks that note who ran, each run as long as `secondsOf` says of its how-manieth run it is; no real clock. */
function machine(secondsOf: (name: string, run: number) => number) {
  let now = 0;
  const log: string[] = [];
  const runs = new Map<string, number>();
  return {
    clock: () => now,
    log,
    task: (name: string) => ({
      run: () => {
        const run = runs.get(name) ?? 0;
        runs.set(name, run + 1);
        log.push(name);
        now += secondsOf(name, run);
      },
    }),
  };
}

function turnsOf(log: readonly string[], size: number): string[] {
  return Array.from({ length: log.length / size }, (_, t) =>
    log.slice(t * size, (t + 1) * size).join(''),
  );
}

describe('a round', () => {
  test('warms up once, then takes one sample of each task in every turn', () => {
    const { clock, log, task } = machine(() => 0.03);
    const round = timeRounds(task('p'), task('c'), [], RULE, clock);
    expect(log.slice(0, 2)).toEqual(['c', 'p']);
    expect(turnsOf(log.slice(2), 2).map((turn) => [...turn].sort().join(''))).toEqual(
      new Array(10).fill('cp'),
    );
    expect(round).toMatchObject({ rounds: 1, unsteady: false, spread: 1 });
    expect(round.pacer).toHaveLength(10);
    expect(round.candidate).toHaveLength(10);
  });

  test('draws the order of each turn, by the seed', () => {
    const orders = (seed: number) => {
      const { clock, log, task } = machine(() => 0.03);
      timeRounds(task('p'), task('c'), [], { ...RULE, repeats: 200, seed }, clock);
      return turnsOf(log.slice(2), 2);
    };
    expect(orders(1)).toEqual(orders(1));
    expect(orders(1)).not.toEqual(orders(2));
    // 200 fair draws: 7 standard deviations of a binomial around the half.
    const pacerFirst = orders(1).filter((turn) => turn === 'pc').length;
    expect(Math.abs(pacerFirst - 100)).toBeLessThan(50);
  });

  test('keeps samples in time order, those of one turn at one place', () => {
    const { clock, task } = machine((name, run) => (name === 'p' ? 0.03 : 0.04) + run * 1e-4);
    const { pacer, candidate } = timeRounds(task('p'), task('c'), [], RULE, clock);
    // Run 0 was warming up.
    candidate.forEach((seconds, i) => {
      expect(seconds).toBeCloseTo(0.04 + (i + 1) * 1e-4, 12);
      expect(pacer[i]).toBeCloseTo(0.03 + (i + 1) * 1e-4, 12);
    });
  });

  test('lets side tasks take part in the first turns only, anywhere in their order', () => {
    const { clock, log, task } = machine(() => 0.03);
    const { sides } = timeRounds(task('p'), task('c'), [task('s'), task('t')], RULE, clock);
    expect(sides.map((seconds) => seconds.length)).toEqual([4, 4]);
    const turns = turnsOf(log.slice(2, 2 + 16), 4);
    expect(turns.map((turn) => [...turn].sort().join(''))).toEqual(new Array(4).fill('cpst'));
    expect(log.slice(18)).not.toContain('s');
  });

  test('is done again while the pacer is uneven, and the first steady one is kept', () => {
    // Two slow runs of ten lift the 95th percentile of round 1; run 0 is warming up.
    const { clock, task } = machine((name, run) =>
      name === 'p' && (run === 3 || run === 7) ? 0.05 : 0.03,
    );
    const round = timeRounds(task('p'), task('c'), [], RULE, clock);
    expect(round).toMatchObject({ rounds: 2, unsteady: false, spread: 1 });
    expect(round.pacer).toEqual(new Array(10).fill(expect.closeTo(0.03, 12)));
  });

  test('is flagged where none was steady, and the steadiest is kept', () => {
    // Slow runs in every round, of 0.06, 0.04 and 0.05 s.
    const slow = [0.06, 0.04, 0.05];
    const { clock, task } = machine((name, run) =>
      name === 'p' && run > 0 && run % 4 === 0 ? slow[Math.floor((run - 1) / 10)] : 0.03,
    );
    const round = timeRounds(task('p'), task('c'), [], RULE, clock);
    expect(round.rounds).toBe(3);
    expect(round.unsteady).toBe(true);
    expect(Math.max(...round.pacer)).toBeCloseTo(0.04, 12);
  });

  test('does not mind an uneven candidate', () => {
    const { clock, task } = machine((name, run) => (name === 'c' && run % 2 ? 0.09 : 0.03));
    expect(timeRounds(task('p'), task('c'), [], RULE, clock)).toMatchObject({
      rounds: 1,
      unsteady: false,
    });
  });

  test('of slow tasks ends at its bound, but not before the least number of turns', () => {
    const { clock, task } = machine(() => 1);
    const round = timeRounds(task('p'), task('c'), [], { ...RULE, seconds: 0.5 }, clock);
    expect(round.pacer).toHaveLength(3);
    const { clock: other, task: next } = machine(() => 1);
    // Warming up takes 2 s, each turn 2: after four turns 10 s are over.
    const longer = timeRounds(next('p'), next('c'), [], { ...RULE, seconds: 10 }, other);
    expect(longer.pacer).toHaveLength(4);
  });

  test('is not begun again where it would pass the bound', () => {
    const uneven = () => machine((name, run) => (name === 'p' && run % 3 === 0 ? 0.06 : 0.03));
    const rounds = (seconds: number) => {
      const { clock, task } = uneven();
      return timeRounds(task('p'), task('c'), [], { ...RULE, seconds }, clock).rounds;
    };
    // A round takes 20 runs, 0.69 s to 0.72 s, and warming up 0.09 s.
    expect(rounds(0.85)).toBe(1);
    expect(rounds(1.6)).toBe(2);
    expect(rounds(10)).toBe(3);
  });

  test('of fewer turns than the least number has what was asked for', () => {
    const { clock, task } = machine(() => 1);
    const round = timeRounds(task('p'), task('c'), [], { ...RULE, repeats: 1 }, clock);
    expect(round).toMatchObject({ pacer: [1], candidate: [1], spread: 1, unsteady: false });
  });
});

test('the spread is the 95th percentile by the median', () => {
  // Of 21 values the 95th percentile is the 20th (Hyndman & Fan 1996, definition 7: place 1 + 20 · 0.95).
  const values = Array.from({ length: 21 }, (_, i) => 100 + i);
  expect(spreadOf(values)).toBeCloseTo(119 / 110, 12);
  expect(STEADY_SPREAD).toBe(1.15);
});
