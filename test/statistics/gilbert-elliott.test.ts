import { describe, expect, it } from 'vitest';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import {
  allArrive,
  badShareOf,
  independentLosses,
  type LossLaw,
  LossProcess,
  lossRateDeviation,
  lossRateOf,
  meanLossRun,
} from '../../src/statistics/gilbert-elliott.ts';

const law = (
  goodToBad: number,
  badToGood: number,
  lostInBad: number,
  lostInGood: number,
): LossLaw => ({ goodToBad, badToGood, lostInBad, lostInGood });

const LAWS: readonly LossLaw[] = [
  law(0.01, 0.3, 0.5, 0),
  law(0.05, 0.1, 1, 0),
  law(0.002, 0.02, 0.8, 0.001),
  // Changes more often than not: losses that shun one another.
  law(0.9, 0.95, 0.7, 0.1),
  independentLosses(0.03),
];

/** Probability of every pattern of losses among n messages, by going through all paths of the channel. */
function patternChances(of: LossLaw, n: number): Map<string, number> {
  const bad = of.goodToBad / (of.goodToBad + of.badToGood);
  const chances = new Map<string, number>();
  const walk = (pattern: string, isBad: boolean, chance: number): void => {
    if (pattern.length === n) {
      chances.set(pattern, (chances.get(pattern) ?? 0) + chance);
      return;
    }
    const lost = isBad ? of.lostInBad : of.lostInGood;
    const toBad = isBad ? 1 - of.badToGood : of.goodToBad;
    for (const [letter, own] of [
      ['x', lost],
      ['.', 1 - lost],
    ] as const) {
      walk(pattern + letter, true, chance * own * toBad);
      walk(pattern + letter, false, chance * own * (1 - toBad));
    }
  };
  walk('', true, bad);
  walk('', false, 1 - bad);
  return chances;
}

const lossesIn = (pattern: string) => pattern.replaceAll('.', '').length;

function shareLost(of: LossLaw, count: number, seed: number): number {
  const losses = new LossProcess(of, new SeededGenerator(seed));
  let lost = 0;
  for (let i = 0; i < count; i++) if (losses.isLost()) lost++;
  return lost / count;
}

describe('Gilbert–Elliott losses', () => {
  it('have the long-run shares of a two-state chain', () => {
    // p ÷ (p + q), and the mean of both losses under it, by hand.
    expect(badShareOf(law(0.01, 0.3, 0.5, 0))).toBeCloseTo(1 / 31, 15);
    expect(lossRateOf(law(0.01, 0.3, 0.5, 0))).toBeCloseTo(1 / 62, 15);
    expect(lossRateOf(law(0.25, 0.75, 0.8, 0.1))).toBeCloseTo(0.275, 15);
    expect(lossRateOf(independentLosses(0.2))).toBeCloseTo(0.2, 15);
  });

  it.each(LAWS)('agree with all paths of the channel: %o', (of) => {
    const n = 7;
    const chances = [...patternChances(of, n)];
    const mean = chances.reduce((sum, [pattern, p]) => sum + (p * lossesIn(pattern)) / n, 0);
    const square = chances.reduce((sum, [pattern, p]) => sum + p * (lossesIn(pattern) / n) ** 2, 0);
    expect(lossRateOf(of)).toBeCloseTo(mean, 12);
    expect(lossRateDeviation(of, n)).toBeCloseTo(Math.sqrt(square - mean * mean), 10);
    const arrive = allArrive(of, n);
    for (let i = 0; i <= n; i++) {
      const none = [...patternChances(of, i)].filter(([pattern]) => lossesIn(pattern) === 0);
      expect(arrive[i]).toBeCloseTo(
        none.reduce((sum, [, p]) => sum + p, 0),
        12,
      );
    }
    // Every run of losses begins once: losses by beginnings.
    const begins = [...patternChances(of, 2)].find(([pattern]) => pattern === '.x')![1];
    expect(meanLossRun(of)).toBeCloseTo(mean / begins, 10);
  });

  it('lose the share of the closed form, within its interval', () => {
    // Five standard deviations: one seed in 1.7 million misses.
    const count = 200_000;
    LAWS.forEach((of, i) => {
      const far = Math.abs(shareLost(of, count, 100 + i) - lossRateOf(of));
      expect(far).toBeLessThan(5 * lossRateDeviation(of, count));
    });
  });

  it('need the correlation in that interval, and no more than it', () => {
    const of = law(0.01, 0.1, 0.9, 0.001);
    const count = 20_000;
    const rate = lossRateOf(of);
    const deviation = lossRateDeviation(of, count);
    const independent = Math.sqrt((rate * (1 - rate)) / count);
    const runs = 300;
    let within = 0;
    let withinIndependent = 0;
    for (let seed = 0; seed < runs; seed++) {
      const far = Math.abs(shareLost(of, count, seed) - rate);
      if (far < 1.96 * deviation) within++;
      if (far < 1.96 * independent) withinIndependent++;
    }
    // 95 % of 300, ± 4 standard deviations of a binomial count.
    const spread = 4 * Math.sqrt(runs * 0.95 * 0.05);
    expect(Math.abs(within - 0.95 * runs)).toBeLessThan(spread);
    expect(withinIndependent).toBeLessThan(0.95 * runs - spread);
  });

  it('come in runs as long as the law says', () => {
    // All is lost in the bad state, nothing else: a run ends with it, 1 ÷ q. Independent: 1 ÷ (1 − p).
    expect(meanLossRun(law(0.02, 0.25, 1, 0))).toBeCloseTo(4, 12);
    expect(meanLossRun(independentLosses(0.2))).toBeCloseTo(1.25, 12);
    const draws = 20_000;
    LAWS.forEach((of, i) => {
      const losses = new LossProcess(of, new SeededGenerator(`runs ${i}`));
      const lengths = Array.from({ length: draws }, () => losses.drawRun(100_000));
      const mean = lengths.reduce((a, b) => a + b, 0) / draws;
      const variance = lengths.reduce((sum, x) => sum + (x - mean) ** 2, 0) / draws;
      expect(Math.abs(mean - meanLossRun(of))).toBeLessThan(5 * Math.sqrt(variance / draws));
    });
  });

  it('are the same for the same seed, and cut where asked', () => {
    const runs = (seed: number) => {
      const losses = new LossProcess(LAWS[1], new SeededGenerator(seed));
      return Array.from({ length: 50 }, () => losses.drawRun(3));
    };
    expect(runs(1)).toEqual(runs(1));
    expect(runs(1)).not.toEqual(runs(2));
    expect(Math.max(...runs(1))).toBe(3);
  });
});
