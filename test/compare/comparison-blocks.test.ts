import { describe, expect, it } from 'vitest';
import { blocksFor, expandedLevel } from '../../src/compare/comparison-blocks.ts';
import { SeededGenerator } from '../../src/statistics/generator.ts';
import { normalQuantile } from '../../src/statistics/normal-law.ts';
import { pairedDifference } from '../../src/statistics/paired-difference.ts';

describe('blocksFor', () => {
  it('takes messages one by one up to 24, then 24 blocks', () => {
    expect(blocksFor(0)).toEqual({ count: 0, unit: 'messages' });
    expect(blocksFor(1)).toEqual({ count: 1, unit: 'messages' });
    expect(blocksFor(24)).toEqual({ count: 24, unit: 'messages' });
    expect(blocksFor(25)).toEqual({ count: 24, unit: 'blocks of messages' });
    expect(blocksFor(1e6)).toEqual({ count: 24, unit: 'blocks of messages' });
  });

  it('takes no more blocks than a sample has', () => {
    expect(blocksFor(5000, undefined, 10)).toEqual({ count: 10, unit: 'blocks of messages' });
    expect(blocksFor(5000, undefined, 60)).toEqual({ count: 24, unit: 'blocks of messages' });
    expect(blocksFor(9, undefined, 10)).toEqual({ count: 9, unit: 'messages' });
  });

  it('puts two filled messages or more into a block', () => {
    expect(blocksFor(5000, 155)).toEqual({ count: 24, unit: 'blocks of units' });
    expect(blocksFor(5000, 47)).toEqual({ count: 23, unit: 'blocks of units' });
    expect(blocksFor(5000, 1)).toEqual({ count: 0, unit: 'blocks of units' });
  });
});

describe('expandedLevel', () => {
  it('widens the normal interval to √(n/(n − 1)) times that of Student', () => {
    // Two-sided 95 % points of Student's t: 2.365 at 7, 2.131 at 15, 2.069 at 23 degrees (tables of t; from memory).
    for (const [blocks, t] of [
      [8, 2.365],
      [16, 2.131],
      [24, 2.069],
    ]) {
      const z = normalQuantile((1 + expandedLevel(blocks)) / 2);
      expect(z).toBeCloseTo(t * Math.sqrt(blocks / (blocks - 1)), 2);
    }
    expect(expandedLevel(1e6)).toBeCloseTo(0.95, 5);
  });

  it.each([8, 24])('lets the interval over %i blocks of a normal law keep its level', (blocks) => {
    const generator = new SeededGenerator(`coverage ${blocks}`);
    const trials = 600;
    const symbols = new Float64Array(blocks).fill(1);
    const bitsA = new Float64Array(blocks);
    let covered = 0;
    for (let trial = 0; trial < trials; trial++) {
      const bitsB = bitsA.map(
        () => 1 + normalQuantile((generator.integer(0, 2 ** 31) + 0.5) / (2 ** 31 + 1)),
      );
      const level = expandedLevel(blocks);
      const { low, high } = pairedDifference({
        bitsA,
        bitsB,
        symbols,
        seed: trial,
        repetitions: 500,
        level,
      });
      if (low <= 1 && 1 <= high) covered++;
    }
    // Four standard errors of a share of 95 % over 600 trials are 3.6 %.
    const slack = 4 * Math.sqrt((0.95 * 0.05) / trials);
    expect(Math.abs(covered / trials - 0.95)).toBeLessThan(slack);
  });
});
