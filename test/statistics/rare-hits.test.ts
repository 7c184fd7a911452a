import { describe, expect, it } from 'vitest';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { drawHits, hitShare } from '../../src/statistics/rare-hits.ts';

describe('rare hits', () => {
  it('hit with the probability of the complement, exact where it is tiny', () => {
    expect(hitShare(4, 0.3)).toBeCloseTo(1 - 0.7 ** 4, 14);
    expect(hitShare(0, 0.3)).toBe(0);
    // n·p for n·p far below 1: the next term is n²p²/2.
    expect(hitShare(1000, 1e-15)).toBeCloseTo(1e-12, 22);
  });

  it('hit every set of places as often as it comes up, given that it is not empty', () => {
    const places = 4;
    const chance = 0.3;
    const generator = new SeededGenerator(5);
    const draws = 40_000;
    const counts = new Map<string, number>();
    for (let i = 0; i < draws; i++) {
      const key = drawHits(places, chance, generator).join();
      counts.set(key, (counts.get(key) ?? 0) + 1);
    }
    let chiSquare = 0;
    for (let set = 1; set < 16; set++) {
      const hits = [0, 1, 2, 3].filter((place) => (set >> place) & 1);
      const p =
        (chance ** hits.length * (1 - chance) ** (places - hits.length)) / (1 - 0.7 ** places);
      chiSquare += ((counts.get(hits.join()) ?? 0) - p * draws) ** 2 / (p * draws);
    }
    expect([...counts.values()].reduce((a, b) => a + b, 0)).toBe(draws);
    // Chi-square with 14 degrees of freedom: 43 lies above its 99.99 % point (42.58).
    expect(chiSquare).toBeLessThan(43);
  });

  it('hit one place alone, each alike, where hits are very rare', () => {
    const generator = new SeededGenerator(6);
    const places = 1000;
    const draws = 20_000;
    let sum = 0;
    let alone = 0;
    for (let i = 0; i < draws; i++) {
      const hits = drawHits(places, 1e-12, generator);
      if (hits.length === 1) alone++;
      sum += hits[0];
    }
    expect(alone).toBe(draws);
    // Uniform on 0 … 999: mean 499.5, deviation √((1000² − 1)/12).
    const error = Math.sqrt((places ** 2 - 1) / 12 / draws);
    expect(Math.abs(sum / draws - 499.5)).toBeLessThan(5 * error);
  });

  it('stay inside, rising, also where almost all are hit', () => {
    const generator = new SeededGenerator(7);
    for (let i = 0; i < 200; i++) {
      const hits = drawHits(20, 0.97, generator);
      expect(hits.every((hit, j) => hit < 20 && (j === 0 || hit > hits[j - 1]))).toBe(true);
    }
    expect(drawHits(1, 0.5, generator)).toEqual([0]);
  });
});
