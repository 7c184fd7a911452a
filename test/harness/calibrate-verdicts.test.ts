import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  type IntervalQuestion,
  judgeChange,
  judgeCoder,
  judgeIntervals,
  shareOfSoMany,
} from '../../src/harness/calibrate-verdicts.ts';

const question = (more: Partial<IntervalQuestion>): IntervalQuestion => ({
  repetitions: 200,
  trusted: 200,
  held: 190,
  bias: 0,
  half_width: 0.1,
  against_order: 'own',
  reason: 'order 1 is not estimable',
  atEdge: false,
  ...more,
});

const verdict = (more: Partial<IntervalQuestion>) => judgeIntervals(question(more)).verdict;

describe('judgeIntervals', () => {
  it('asks for 85 % and no more than 99 %', () => {
    expect(verdict({})).toBe('holds');
    expect(verdict({ held: 170 })).toBe('holds');
    expect(verdict({ held: 169 })).toBe('misses');
    expect(verdict({ held: 198 })).toBe('holds');
    expect(verdict({ held: 199 })).toBe('misses');
  });

  it('allows 100 % at an end of the scale, below the order of the source, and in few runs', () => {
    expect(verdict({ held: 200, atEdge: true })).toBe('holds');
    expect(verdict({ held: 200, against_order: 'below' })).toBe('holds');
    expect(verdict({ held: 199, trusted: 199 })).toBe('holds');
    expect(verdict({ repetitions: 20, trusted: 20, held: 20 })).toBe('holds');
    expect(verdict({ repetitions: 20, trusted: 20, held: 16 })).toBe('misses');
  });

  it('counts a line as flagged where fewer than half are trusted, unless too many of all miss', () => {
    expect(judgeIntervals(question({ trusted: 0, held: 0 }))).toEqual({
      verdict: 'flagged beforehand',
      verdict_text: 'order 1 is not estimable',
    });
    expect(verdict({ trusted: 99, held: 70 })).toBe('flagged beforehand');
    expect(verdict({ trusted: 99, held: 68 })).toBe('misses');
    expect(verdict({ trusted: 100, held: 84 })).toBe('misses');
  });

  it('judges a single run by two half-widths', () => {
    const one = { repetitions: 1, trusted: 1 };
    expect(verdict({ ...one, held: 1, bias: 0.05 })).toBe('holds');
    expect(verdict({ ...one, held: 0, bias: -0.19 })).toBe('holds');
    expect(verdict({ ...one, held: 0, bias: 0.21 })).toBe('misses');
    expect(verdict({ ...one, trusted: 0, held: 0, bias: 9 })).toBe('flagged beforehand');
  });
});

it('judgeCoder lets luck take thirty bits', () => {
  expect(judgeCoder(970, 1000).verdict).toBe('holds');
  expect(judgeCoder(969, 1000)).toEqual({
    verdict: 'misses',
    verdict_text: '31 bits less than these symbols contain',
  });
});

describe('judgeChange', () => {
  it('asks for 19 of 20 changes', () => {
    expect(judgeChange(true, 19, 20).verdict).toBe('holds');
    expect(judgeChange(true, 18, 20).verdict).toBe('misses');
  });

  it('allows as many false alarms as one in a hundred explains', () => {
    // Binomial(20, 0.01): three or more have probability 0.0010036, four or more 4.3e−5.
    expect(judgeChange(false, 3, 20).verdict).toBe('holds');
    expect(judgeChange(false, 4, 20).verdict).toBe('misses');
    expect(judgeChange(false, 0, 1).verdict).toBe('holds');
  });
});

it('shareOfSoMany is the tail of a binomial law', () => {
  // By enumeration of all outcomes of up to ten runs.
  fc.assert(
    fc.property(
      fc.integer({ min: 0, max: 10 }),
      fc.integer({ min: 0, max: 10 }),
      fc.integer({ min: 1, max: 99 }),
      (runs, count, hundredths) => {
        const share = hundredths / 100;
        let expected = 0;
        for (let outcome = 0; outcome < 2 ** runs; outcome++) {
          const successes = outcome.toString(2).replaceAll('0', '').length;
          if (successes >= count)
            expected += share ** successes * (1 - share) ** (runs - successes);
        }
        expect(shareOfSoMany(count, runs, share)).toBeCloseTo(expected, 10);
      },
    ),
  );
});
