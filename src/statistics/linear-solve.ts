import { InputError } from '../errors/errors.ts';

/**
 * Solves A·x = b by elimination with the largest pivot of each column; overwrites both arguments.
 *
 * @param matrix  shape [n·n], by rows
 * @param right   shape [n]
 * @returns `right`, which now holds x
 * @throws InputError where no pivot is left: the equations do not determine x
 * Cost: n³ ÷ 3 multiplications.
 * Source: Golub & Van Loan, "Matrix Computations", 4th ed. 2013, §3.4 (partial pivoting).
 */
export function solveLinear(matrix: Float64Array, right: Float64Array): Float64Array {
  const n = right.length;
  for (let column = 0; column < n; column++) {
    let pivotRow = column;
    for (let row = column + 1; row < n; row++) {
      if (Math.abs(matrix[row * n + column]) > Math.abs(matrix[pivotRow * n + column]))
        pivotRow = row;
    }
    const pivot = matrix[pivotRow * n + column];
    if (Math.abs(pivot) < 1e-13) {
      throw new InputError('these equations do not determine their unknowns', {
        got: `no pivot in column ${column} of ${n}`,
      });
    }
    if (pivotRow !== column) swapRows(matrix, right, pivotRow, column);
    for (let row = column + 1; row < n; row++) {
      const factor = matrix[row * n + column] / pivot;
      if (factor === 0) continue;
      for (let j = column; j < n; j++) matrix[row * n + j] -= factor * matrix[column * n + j];
      right[row] -= factor * right[column];
    }
  }
  for (let row = n - 1; row >= 0; row--) {
    let sum = right[row];
    for (let j = row + 1; j < n; j++) sum -= matrix[row * n + j] * right[j];
    right[row] = sum / matrix[row * n + row];
  }
  return right;
}

function swapRows(matrix: Float64Array, right: Float64Array, a: number, b: number): void {
  const n = right.length;
  for (let j = 0; j < n; j++) {
    const kept = matrix[a * n + j];
    matrix[a * n + j] = matrix[b * n + j];
    matrix[b * n + j] = kept;
  }
  const kept = right[a];
  right[a] = right[b];
  right[b] = kept;
}

/**
 * The share of time that a chain spends in each of its states in the long run.
 *
 * @param transitions  shape [n·n], by rows; each row sums to 1
 * @returns shape [n], sums to 1; 0 for states that the chain leaves for good
 * @throws InputError where the chain has several parts that it cannot leave, so that the share depends on its start
 * Source: Cover & Thomas, "Elements of Information Theory", 2nd ed. 2006, §4.1: μ = μP with one equation replaced by Σ μ = 1.
 */
export function stationaryShares(transitions: Float64Array, states: number): Float64Array {
  const matrix = new Float64Array(states * states);
  for (let from = 0; from < states; from++) {
    for (let to = 0; to < states; to++)
      matrix[to * states + from] = transitions[from * states + to];
    matrix[from * states + from] -= 1;
  }
  matrix.fill(1, (states - 1) * states);
  const right = new Float64Array(states);
  right[states - 1] = 1;
  // Elimination leaves a hair on either side of 0 for states that are left for good.
  return solveLinear(matrix, right).map((share) => (share < 1e-12 ? 0 : share));
}
