import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import {
  adaptivePairs,
  crossingOf,
  leastPoint,
  trainingReturn,
} from '../../src/compare/curve-findings.ts';
import type { CurveLine } from '../../src/compare/curve-points.ts';
import type { Curve } from '../../src/compare/curves.ts';

const line = (points: readonly (readonly [number, number])[], tables = 'shipped'): CurveLine => ({
  candidate: 'huffman',
  tables,
  reset: 'message',
  points: points.map(([x, rate]) => ({ x, rate, cell: '' })),
});

describe('the point of diminishing return', () => {
  it('is the least share beyond which no doubling gains a hundredth of the rate', () => {
    // Doublings gain 10 %, 5 %, then 0.4 %.
    const found = trainingReturn(
      line([
        [0.125, 4],
        [0.25, 3.6],
        [0.5, 3.42],
        [1, 3.42 * 0.996],
      ]),
    );
    expect(found.enough).toBe(0.5);
    expect(found.lastGain).toBeCloseTo(0.004, 12);
  });

  it('counts a step of several doublings by each of them', () => {
    // From 0.01 to 0.64 are six doublings: 12 % in all is 2 % each, 3 % in all is 0.5 % each.
    expect(
      trainingReturn(
        line([
          [0.01, 4],
          [0.64, 4 * 0.88],
        ]),
      ).enough,
    ).toBeUndefined();
    expect(
      trainingReturn(
        line([
          [0.01, 4],
          [0.64, 4 * 0.97],
        ]),
      ).enough,
    ).toBe(0.01);
  });

  it('is not where the last step still gains, nor before a later gain', () => {
    const gaining = trainingReturn(
      line([
        [0.25, 4],
        [0.5, 3.9],
        [1, 3.8],
      ]),
    );
    expect(gaining.enough).toBeUndefined();
    expect(gaining.lastGain).toBeCloseTo(0.1 / 3.9, 12);
    // Nothing from 0.25 to 0.5, but 10 % after it.
    expect(
      trainingReturn(
        line([
          [0.25, 4],
          [0.5, 4],
          [1, 3.6],
        ]),
      ).enough,
    ).toBeUndefined();
  });

  it('stands at the least share where more data never help, or harm', () => {
    const found = trainingReturn(
      line([
        [0.5, 3],
        [1, 3.3],
      ]),
    );
    expect(found.enough).toBe(0.5);
    expect(found.lastGain).toBeCloseTo(-0.1, 12);
  });
});

describe('where an adaptive coder overtakes', () => {
  const shipped = line([
    [16, 4],
    [64, 4],
    [256, 4],
    [1024, 4],
  ]);

  it('is between the sizes around the crossing, on a line over their logarithms', () => {
    const learned = line(
      [
        [16, 8],
        [64, 5],
        [256, 3],
        [1024, 2],
      ],
      'learned',
    );
    // +1 at 64 and −1 at 256: half-way in log2, at 128.
    const found = crossingOf(learned, shipped);
    expect(found).toMatchObject({ kind: 'between', from: 64, to: 256 });
    expect(found?.kind === 'between' && found.about).toBeCloseTo(128, 9);
  });

  it('is at a size where both are equal, when it stays ahead after it', () => {
    const found = crossingOf(
      line(
        [
          [16, 8],
          [64, 4],
          [256, 3],
        ],
        'learned',
      ),
      shipped,
    );
    expect(found).toMatchObject({ kind: 'between', from: 16, to: 64 });
    expect(found?.kind === 'between' && found.about).toBeCloseTo(64, 9);
  });

  it('is the last of several', () => {
    const learned = line(
      [
        [16, 3],
        [64, 5],
        [256, 3],
        [1024, 3],
      ],
      'learned',
    );
    expect(crossingOf(learned, shipped)).toMatchObject({ from: 64, to: 256 });
  });

  it('is never or always where the order never changes', () => {
    expect(
      crossingOf(
        line(
          [
            [16, 8],
            [64, 5],
          ],
          'learned',
        ),
        shipped,
      ),
    ).toEqual({ kind: 'never' });
    expect(
      crossingOf(
        line(
          [
            [16, 3],
            [64, 4],
          ],
          'learned',
        ),
        shipped,
      ),
    ).toEqual({ kind: 'always' });
  });

  it('looks only at sizes that both have', () => {
    expect(
      crossingOf(
        line(
          [
            [16, 3],
            [100, 5],
          ],
          'learned',
        ),
        shipped,
      ),
    ).toBeUndefined();
    const learned = line(
      [
        [16, 8],
        [100, 1],
        [256, 3],
      ],
      'learned',
    );
    expect(crossingOf(learned, shipped)).toMatchObject({ from: 16, to: 256 });
  });

  it('parts sizes into those before, where the shipped one is ahead at last, and those after', () => {
    const rates = fc.array(fc.integer({ min: 1, max: 8 }), { minLength: 2, maxLength: 8 });
    fc.assert(
      fc.property(rates, rates, (a, b) => {
        const points = (all: number[]) => all.map((rate, i): [number, number] => [2 ** i, rate]);
        const found = crossingOf(line(points(a), 'learned'), line(points(b)));
        const common = Math.min(a.length, b.length);
        const ahead = Array.from({ length: common }, (_, i) => a[i] <= b[i]);
        if (found?.kind === 'always') expect(ahead.every(Boolean)).toBe(true);
        else if (found?.kind === 'never') expect(ahead.at(-1)).toBe(false);
        else if (found?.kind === 'between') {
          const { from, to, about } = found;
          expect(to).toBe(2 * from);
          expect(ahead[Math.log2(from)]).toBe(false);
          expect(ahead.slice(Math.log2(to)).every(Boolean)).toBe(true);
          expect(about).toBeGreaterThan(from);
          expect(about).toBeLessThanOrEqual(to * (1 + 1e-12));
        }
      }),
    );
  });
});

describe('pairs and least points', () => {
  it('a learned line is held against the shipped one of its own candidate, under reset message', () => {
    const other = {
      ...line([
        [1, 1],
        [2, 2],
      ]),
      candidate: 'arith:order=1',
    };
    const own = line([
      [1, 1],
      [2, 2],
    ]);
    const learned = line(
      [
        [1, 1],
        [2, 2],
      ],
      'learned',
    );
    const never = { ...learned, reset: 'never' };
    const curve: Curve = {
      corpus: 'a',
      over: 'message_symbols',
      from: 'vary',
      variation: '',
      lines: [other, never, learned, own],
    };
    expect(adaptivePairs(curve)).toEqual([{ adaptive: learned, shipped: own }]);
  });

  it('of equal rates the first is least', () => {
    expect(
      leastPoint(
        line([
          [1, 3],
          [2, 2],
          [3, 2],
        ]),
      ).x,
    ).toBe(2);
  });
});
