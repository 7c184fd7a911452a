import { describe, expect, it } from 'vitest';
import { fitWeights, NormalEquations } from '../../src/models/field-least-squares.ts';
import { CONSTANT, type LinearRows, WEIGHT_ONE } from '../../src/models/field-linear.ts';
import { integers } from '../conformance/sequences.ts';

/** Rows of a constant, an own change and one input, whose changes are made by the two weightings. */
function rowsOf(
  count: number,
  changeOf: (own: number, change: number, distance: number, row: number) => number,
): LinearRows {
  const next = integers(3);
  const draw = () => Float64Array.from({ length: count }, () => (next() % 201) - 100);
  const [own, change, distance] = [draw(), draw(), draw()];
  return {
    columns: [new Float64Array(count).fill(CONSTANT), own, change, distance],
    changes: own.map((value, row) => changeOf(value, change[row], distance[row], row)),
    records: Uint32Array.from({ length: count }, (_, row) => row),
  };
}

const ALL = [0, 1, 2, 3];

describe('weights of linear prediction', () => {
  it('are those that a source was made with, to within the ridge, 1/1024 of each', () => {
    const rows = rowsOf(400, (own, change, distance) => 32 - own / 2 + change / 4 + distance);
    const { weights } = new NormalEquations(rows, undefined, 1).solve(ALL);
    for (const [i, made] of [32 / CONSTANT, -1 / 2, 1 / 4, 1].entries())
      expect(Math.abs(weights[i] - made)).toBeLessThan(0.004);
    const fitted = fitWeights(rows, undefined, 1, weights);
    for (const [i, made] of [32 / CONSTANT, -1 / 2, 1 / 4, 1].entries())
      expect(Math.abs(fitted[i] / WEIGHT_ONE - made)).toBeLessThan(0.01);
  });

  it('solve two equations as Cramer’s rule does', () => {
    const rows = rowsOf(50, (own, change) => own - 3 * change + 7);
    const [, own, change] = rows.columns;
    const dot = (a: Float64Array, b: Float64Array) => a.reduce((sum, v, i) => sum + v * b[i], 0);
    // All in one class: 16 shared records are 16/50 more of the same.
    const times = 1 + 16 / 50;
    const aa = times * dot(own, own) * (1 + 1 / 1024) + 1;
    const bb = times * dot(change, change) * (1 + 1 / 1024) + 1;
    const ab = times * dot(own, change);
    const [ya, yb] = [times * dot(own, rows.changes), times * dot(change, rows.changes)];
    const determinant = aa * bb - ab * ab;
    const { weights } = new NormalEquations(rows, undefined, 1).solve([1, 2]);
    expect(weights[0]).toBeCloseTo((ya * bb - yb * ab) / determinant, 9);
    expect(weights[1]).toBeCloseTo((yb * aa - ya * ab) / determinant, 9);
  });

  it('are fitted class by class, and in a class without records as in all', () => {
    const classes = Uint8Array.from({ length: 600 }, (_, row) => row % 2);
    const rows = rowsOf(600, (own, _, __, row) => (row % 2 === 0 ? own : -own));
    const { weights } = new NormalEquations(rows, classes, 3).solve([0, 1]);
    expect(Math.abs(weights[1] - 1)).toBeLessThan(0.1);
    expect(Math.abs(weights[3] + 1)).toBeLessThan(0.1);
    expect(Math.abs(weights[5])).toBeLessThan(0.2);
  });

  it('heed a few far rows less than least squares do', () => {
    const far = (row: number) => (row % 10 === 0 ? 2000 : 0);
    const rows = rowsOf(500, (own, _, __, row) => own / 2 + far(row));
    const { weights } = new NormalEquations(rows, undefined, 1).solve(ALL);
    const fitted = fitWeights(rows, undefined, 1, weights);
    // A constant of 200 is the mean of what was added, 0 its median.
    expect(weights[0] * CONSTANT).toBeGreaterThan(150);
    expect(Math.abs((fitted[0] * CONSTANT) / WEIGHT_ONE)).toBeLessThan(40);
  });

  it('are 0 where there are no rows', () => {
    const rows = rowsOf(0, () => 0);
    const { weights } = new NormalEquations(rows, undefined, 1).solve(ALL);
    expect([...fitWeights(rows, undefined, 1, weights)]).toEqual([0, 0, 0, 0]);
  });
});
