import { type LinearRows, WEIGHT_ONE } from './field-linear.ts';

/*
 * Weights of linear prediction from a train split, by additions, multiplications and exactly
 * rounded quotients in a fixed order: the same on every machine.
 *
 * Source: least squares by normal equations, C. F. Gauss 1809; ridge: A. E. Hoerl, R. W. Kennard
 * 1970; least absolute errors by weighing rows anew: E. J. Schlossmacher 1973 (from memory).
 */

const LARGEST_WEIGHT = 2 ** 15 - 1;

/** What is added to the squares is so small a part of them. */
const RIDGE = 1024;

/** Fits after the first. */
const ROUNDS = 3;

/** The error below which a row counts no more. */
const LEAST_ERROR = 2;

/** A class is fitted as if it held besides so many records spread as in all classes. */
const SHARED_RECORDS = 16;

/** Sums of products of all columns, class by class: what least squares over any of them needs. */
export class NormalEquations {
  readonly #size: number;
  readonly #classCount: number;
  /** Of each class, and of all at last: products of columns, then of columns and changes. */
  readonly #products: Float64Array;
  readonly #withChanges: Float64Array;
  readonly #counts: Float64Array;

  /**
   * @param classes  of each record; absent: all in one class
   * @param trust    of each row, how much it counts; absent: all alike
   */
  constructor(
    rows: LinearRows,
    classes: Uint8Array | undefined,
    classCount: number,
    trust?: Float64Array,
  ) {
    const { columns, changes, records } = rows;
    const size = columns.length;
    this.#size = size;
    this.#classCount = classCount;
    this.#products = new Float64Array((classCount + 1) * size * size);
    this.#withChanges = new Float64Array((classCount + 1) * size);
    this.#counts = new Float64Array(classCount + 1);
    const products = this.#products;
    const withChanges = this.#withChanges;
    const row = new Float64Array(size);
    for (let r = 0; r < changes.length; r++) {
      for (let a = 0; a < size; a++) row[a] = columns[a][r];
      const from = classes === undefined ? 0 : classes[records[r]];
      const times = trust === undefined ? 1 : trust[r];
      this.#counts[from] += times;
      for (let a = 0; a < size; a++) {
        const at = (from * size + a) * size;
        const value = times * row[a];
        withChanges[from * size + a] += value * changes[r];
        for (let b = 0; b <= a; b++) products[at + b] += value * row[b];
      }
    }
    this.#addAll();
  }

  #addAll(): void {
    const add = (sums: Float64Array, each: number) => {
      for (let from = 0; from < this.#classCount; from++)
        for (let i = 0; i < each; i++) sums[this.#classCount * each + i] += sums[from * each + i];
    };
    add(this.#products, this.#size * this.#size);
    add(this.#withChanges, this.#size);
    add(this.#counts, 1);
  }

  /**
   * Weights of the chosen columns, class by class, before they are rounded; and by how much they
   * lower the sum of squares.
   */
  solve(chosen: readonly number[]): { weights: Float64Array; lowered: number } {
    const size = this.#size;
    const n = chosen.length;
    const all = this.#classCount;
    const shared = this.#counts[all] === 0 ? 0 : SHARED_RECORDS / this.#counts[all];
    const weights = new Float64Array(all * n);
    const matrix = new Float64Array(n * n);
    const right = new Float64Array(n);
    let lowered = 0;
    for (let from = 0; from < all; from++) {
      for (let a = 0; a < n; a++) {
        right[a] =
          this.#withChanges[from * size + chosen[a]] +
          shared * this.#withChanges[all * size + chosen[a]];
        for (let b = 0; b < n; b++) {
          const low = Math.min(chosen[a], chosen[b]);
          const place = Math.max(chosen[a], chosen[b]) * size + low;
          matrix[a * n + b] =
            this.#products[from * size * size + place] +
            shared * this.#products[all * size * size + place];
        }
        matrix[a * n + a] += matrix[a * n + a] / RIDGE + 1;
      }
      const own = weights.subarray(from * n, from * n + n);
      eliminate(matrix, right, own, n);
      for (let a = 0; a < n; a++) lowered += own[a] * this.#withChanges[from * size + chosen[a]];
    }
    return { weights, lowered };
  }
}

/**
 * Weights that make the absolute errors small, as code lengths ask, by least squares in which a row
 * counts the less the larger its error was before (E. J. Schlossmacher 1973).
 * @param weights  of a first fit
 */
export function fitWeights(
  rows: LinearRows,
  classes: Uint8Array | undefined,
  classCount: number,
  weights: Float64Array,
): Int16Array {
  const size = rows.columns.length;
  const trust = new Float64Array(rows.changes.length);
  let fitted = weights;
  for (let round = 0; round < ROUNDS; round++) {
    for (let row = 0; row < trust.length; row++) {
      let error = rows.changes[row];
      const from = classes === undefined ? 0 : size * classes[rows.records[row]];
      for (let a = 0; a < size; a++) error -= rows.columns[a][row] * fitted[from + a];
      trust[row] = 1 / Math.max(LEAST_ERROR, Math.abs(error));
    }
    fitted = new NormalEquations(rows, classes, classCount, trust).solve(
      rows.columns.map((_, column) => column),
    ).weights;
  }
  return roundWeights(fitted);
}

/** Solves a positive definite system in place by elimination. */
function eliminate(matrix: Float64Array, right: Float64Array, out: Float64Array, n: number): void {
  for (let i = 0; i < n; i++) {
    for (let row = i + 1; row < n; row++) {
      const factor = matrix[row * n + i] / matrix[i * n + i];
      for (let column = i; column < n; column++)
        matrix[row * n + column] -= factor * matrix[i * n + column];
      right[row] -= factor * right[i];
    }
  }
  for (let i = n - 1; i >= 0; i--) {
    let sum = right[i];
    for (let column = i + 1; column < n; column++) sum -= matrix[i * n + column] * out[column];
    out[i] = sum / matrix[i * n + i];
  }
}

/** Weights as whole numbers of 1/4096. */
function roundWeights(weights: Float64Array): Int16Array {
  return Int16Array.from(weights, (weight) => {
    const rounded = Math.floor(weight * WEIGHT_ONE + 0.5);
    return Math.max(-LARGEST_WEIGHT, Math.min(LARGEST_WEIGHT, rounded));
  });
}
