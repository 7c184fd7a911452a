import fc from 'fast-check';
import { describe, expect, it } from 'vitest';
import { heightRow, ratePlot } from '../../src/report/rate-plot.ts';

const row = (label: string, point: number, half = 0, faint = false) => ({
  label,
  point,
  ...(half === 0 ? {} : { low: point - half, high: point + half }),
  faint,
});

describe('ratePlot', () => {
  it('draws points, bands, the open mark and the ceiling over one scale', () => {
    // ' order 0 |' takes 10 of 31 characters, so 21 cells are left for 0 to 10 bits: two for each bit, the last at 20.
    const text = ratePlot([row('order 0', 7, 2), row('order 1', 3, 0, true)], {
      width: 31,
      ascii: true,
      ceiling: { name: 'x', rate: 10 },
    });
    expect(text).toEqual([
      '          0   2   4   6   8',
      ' order 0 |          [---*---] :',
      ' order 1 |      o             :',
      ' ceiling |            10.00 x :',
    ]);
  });

  it('keeps to its width and shows every row, whatever the rates', () => {
    const rates = fc.double({ min: 0, max: 64, noNaN: true });
    fc.assert(
      fc.property(
        fc.array(fc.tuple(rates, rates, fc.boolean()), { minLength: 1, maxLength: 8 }),
        fc.option(rates, { nil: undefined }),
        fc.integer({ min: 40, max: 120 }),
        fc.boolean(),
        (points, ceiling, width, ascii) => {
          const rows = points.map(([point, half, faint], k) => ({
            label: `order ${k}`,
            point,
            low: Math.max(0, point - half),
            high: point + half,
            faint,
          }));
          const lines = ratePlot(rows, {
            width,
            ascii,
            ...(ceiling === undefined ? {} : { ceiling: { name: 'arith:order=2', rate: ceiling } }),
          });
          expect(lines).toHaveLength(rows.length + (ceiling === undefined ? 1 : 2));
          for (const line of lines) expect([...line].length).toBeLessThanOrEqual(width);
          rows.forEach((r, k) => {
            const mark = ascii ? (r.faint ? 'o' : '*') : r.faint ? '○' : '●';
            expect([...lines[k + 1].slice(9)].filter((c) => c === mark)).toHaveLength(1);
          });
        },
      ),
    );
  });
});

describe('heightRow', () => {
  it('spreads values over eight heights, and equal ones over none', () => {
    expect(heightRow([0, 1, 2, 3, 4, 5, 6, 7, 8], true)).toBe('123456788');
    expect(heightRow([3, 3, 3], true)).toBe('111');
    expect(heightRow([1, 2], false)).toBe('▁█');
  });
});

describe('the scale', () => {
  it.each([0, Number.MIN_VALUE, 1e-300])('ends where rates of %d do not', (rate) => {
    const [scale, line] = ratePlot([row('order 0', rate)], { width: 40, ascii: true });
    expect(scale.trim()).toMatch(/^0 +0\.000[25]/);
    expect(line).toBe(' order 0 |*');
  });
});
