import { cumulativeStdNormalProbability } from 'simple-statistics';
import { describe, expect, it } from 'vitest';
import { InputError } from '../../src/errors/errors.ts';
import {
  chiSquareQuantile,
  normalQuantile,
  normalShareBelow,
  studentQuantile,
} from '../../src/statistics/normal-law.ts';

describe('the normal law', () => {
  it('gives the shares of the reference library simple-statistics, whose table has four digits', () => {
    for (let x = -3; x <= 3; x += 0.25) {
      expect(Math.abs(normalShareBelow(x) - cumulativeStdNormalProbability(x))).toBeLessThan(1e-4);
    }
  });

  it('gives tails to full precision', () => {
    // As erfc of the C library gives them: ½ erfc(x/√2) for x = 1, 2, 3, 5.
    expect(normalShareBelow(-1)).toBeCloseTo(0.158655253931457, 14);
    expect(normalShareBelow(-2)).toBeCloseTo(0.022750131948179, 14);
    expect(normalShareBelow(-3)).toBeCloseTo(0.00134989803163, 14);
    expect(normalShareBelow(-5) / 2.866515719e-7).toBeCloseTo(1, 9);
    expect(normalShareBelow(5)).toBeCloseTo(1 - 2.866515719e-7, 12);
    expect(normalShareBelow(-40)).toBe(0);
    expect(normalShareBelow(40)).toBe(1);
  });

  it('has both of its forms meet where one takes over from the other', () => {
    expect(normalShareBelow(-2.9999999999) / normalShareBelow(-3)).toBeCloseTo(1, 8);
  });

  it('turns a share back into its number', () => {
    // From memory: the two-sided 95 % quantile.
    expect(normalQuantile(0.975)).toBeCloseTo(1.95996398454, 11);
    expect(normalQuantile(0.5)).toBeCloseTo(0, 14);
    for (const share of [1e-12, 0.003, 0.2, 0.77, 0.9999]) {
      expect(normalShareBelow(normalQuantile(share))).toBeCloseTo(share, 13);
    }
    expect(normalQuantile(0)).toBe(Number.NEGATIVE_INFINITY);
    expect(normalQuantile(1)).toBe(Number.POSITIVE_INFINITY);
    for (const share of [-0.1, 1.1, Number.NaN]) {
      expect(() => normalQuantile(share)).toThrow(InputError);
    }
  });
});

it("Student's quantiles are those of the tables", () => {
  // Two-sided 95 % at 10, 30, 60, 120 degrees of freedom, from memory of the printed tables.
  for (const [freedom, expected] of [
    [10, 2.228],
    [30, 2.042],
    [60, 2.0],
    [120, 1.98],
  ]) {
    expect(Math.abs(studentQuantile(0.975, freedom) - expected)).toBeLessThan(0.002);
  }
});

it('chi-square quantiles are those of the tables, nearly', () => {
  // Upper 1 % at 1, 4, 30 degrees of freedom, from memory of the printed tables; the cube root is off by 1 % at 1.
  for (const [freedom, expected] of [
    [1, 6.635],
    [4, 13.277],
    [30, 50.892],
  ]) {
    expect(Math.abs(chiSquareQuantile(0.99, freedom) / expected - 1)).toBeLessThan(0.015);
  }
  expect(chiSquareQuantile(0.99, 0)).toBe(0);
  expect(chiSquareQuantile(0.0001, 1)).toBe(0);
});
