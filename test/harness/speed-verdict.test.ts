import { describe, expect, test } from 'vitest';
import { type RoundRule, timeRounds } from '../../src/harness/time-rounds.ts';
import { compareSpeeds, type PacedSamples } from '../../src/statistics/speed-verdict.ts';
import { type MachineNoise, SimulatedMachine } from './simulated-machine.ts';

/** No real clock here: every time is drawn by a seed. */

const RULE: Omit<RoundRule, 'seed'> = {
  repeats: 20,
  sideTurns: 0,
  shortestSideSeconds: 0.02,
  leastTurns: 3,
  mostRounds: 3,
  shortestSeconds: 0.02,
  longestSeconds: 0.2,
  seconds: Number.POSITIVE_INFINITY,
};

/** What the harness would take down of a coder of that pace: one run a sample, so that nothing is averaged out. */
function timed(seed: string, seconds: number, noise: MachineNoise, repeats = 20): PacedSamples {
  const machine = new SimulatedMachine(seed, noise);
  const round = timeRounds(
    machine.task(0.021),
    machine.task(seconds),
    [],
    { ...RULE, repeats, seed },
    machine.clock,
  );
  return { seconds: round.candidate, pacerSeconds: round.pacer, unsteady: round.unsteady };
}

/** Share of trials in which the second, slower by that ratio, is called slower. */
function calledSlower(ratio: number, noise: MachineNoise, trials = 1000): number {
  let slower = 0;
  for (let trial = 0; trial < trials; trial++) {
    const first = timed(`${trial} first`, 0.03, noise);
    const second = timed(`${trial} second`, 0.03 * ratio, noise);
    if (compareSpeeds(first, second).verdict === 'slower') slower++;
  }
  return slower / trials;
}

const QUIET: MachineNoise = { jitter: 0.015, spikes: 0.03, drift: 0.1 };
const BUSY: MachineNoise = { jitter: 0.04, spikes: 0.1, drift: 0.2 };

describe('slower, on simulated noise', () => {
  test('is a false alarm in at most 1 % of trials where nothing is slower', () => {
    expect(calledSlower(1, QUIET)).toBeLessThanOrEqual(0.01);
    expect(calledSlower(1, BUSY)).toBeLessThanOrEqual(0.01);
  });

  test('is a false alarm in at most 1 % of trials also where the truth is just what is allowed', () => {
    expect(calledSlower(1.03, QUIET)).toBeLessThanOrEqual(0.01);
    expect(calledSlower(1.03, BUSY)).toBeLessThanOrEqual(0.01);
  });

  test('is said of 10 % more time in at least 99 % of trials', () => {
    expect(calledSlower(1.1, QUIET)).toBeGreaterThanOrEqual(0.99);
    expect(calledSlower(1.1, { ...QUIET, jitter: 0.02 })).toBeGreaterThanOrEqual(0.99);
  });

  test('is said less often on a busy machine, where intervals are wide', () => {
    const caught = calledSlower(1.1, BUSY, 200);
    expect(caught).toBeLessThan(0.9);
    expect(calledSlower(1.5, BUSY, 200)).toBeGreaterThan(caught);
  });
});

describe('a comparison of speeds', () => {
  const even = (seconds: number, turns = 20): PacedSamples => ({
    // A hundredth of a percent apart, so that samples differ.
    seconds: Array.from({ length: turns }, (_, i) => seconds * (1 + i * 1e-4)),
    pacerSeconds: new Array(turns).fill(0.02),
    unsteady: false,
  });

  test.each([
    [1.05, 'slower'],
    [1.0, 'alike'],
    [1.02, 'alike'],
    [0.98, 'alike'],
    [0.95, 'faster'],
    [1.03, 'undecided'],
  ])('of %f times as long says %s', (ratio, verdict) => {
    const {
      ratio: found,
      low,
      high,
      verdict: said,
    } = compareSpeeds(even(0.01), even(0.01 * ratio));
    expect(found).toBeCloseTo(ratio, 3);
    expect(low).toBeLessThanOrEqual(found);
    expect(high).toBeGreaterThanOrEqual(found);
    expect(said).toBe(verdict);
  });

  test('counts what the pacer takes in the same turn', () => {
    const first = even(0.01);
    // The whole machine at half its pace from the tenth turn on.
    const slowed: PacedSamples = {
      seconds: first.seconds.map((own, i) => (i < 10 ? own : 2 * own)),
      pacerSeconds: first.pacerSeconds.map((own, i) => (i < 10 ? own : 2 * own)),
      unsteady: false,
    };
    const { ratio, verdict } = compareSpeeds(first, slowed);
    expect(ratio).toBeCloseTo(1, 9);
    expect(verdict).toBe('alike');
  });

  test('does not decide by fewer than five samples, whatever they are', () => {
    expect(compareSpeeds(even(0.01, 4), even(1, 4))).toMatchObject({
      low: 0,
      high: Number.POSITIVE_INFINITY,
      verdict: 'undecided',
    });
    expect(compareSpeeds(even(0.01, 5), even(1, 5)).verdict).toBe('slower');
  });

  test('passes on that one side was timed on an uneven machine', () => {
    const [a, b] = [even(0.01), even(0.02)];
    expect(compareSpeeds(a, b)).toMatchObject({ verdict: 'slower', unsteady: false });
    for (const [first, second] of [
      [a, { ...b, unsteady: true }],
      [{ ...a, unsteady: true }, b],
    ])
      expect(compareSpeeds(first, second)).toMatchObject({ verdict: 'slower', unsteady: true });
  });

  test('takes another level and another allowance', () => {
    const pair = [even(0.01), even(0.0105)] as const;
    expect(compareSpeeds(...pair, { allowed: 1.1 }).verdict).toBe('alike');
    expect(compareSpeeds(even(0.01, 4), even(1, 4), { level: 0.9 }).verdict).toBe('slower');
  });
});
