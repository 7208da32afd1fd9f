/** Small systems of linear equations, as least squares leaves them. */

/**
 * Solves a x = b by Gaussian elimination with row pivoting. Both are overwritten: b with the solution.
 * @param a n x n, row after row
 * @param b n
 * @returns false, and b without meaning, where a is singular or holds a not-a-number
 */
export function solve(a: Float64Array, b: Float64Array, n: number): boolean {
  for (let column = 0; column < n; column++) {
    let pivot = column;
    for (let row = column + 1; row < n; row++) {
      if (Math.abs(a[row * n + column]) > Math.abs(a[pivot * n + column])) pivot = row;
    }
    const largest = a[pivot * n + column];
    if (!(Math.abs(largest) > 1e-300)) return false;
    if (pivot !== column) swapRows(a, b, n, pivot, column);
    for (let row = column + 1; row < n; row++) {
      const share = a[row * n + column] / largest;
      for (let k = column; k < n; k++) a[row * n + k] -= share * a[column * n + k];
      b[row] -= share * b[column];
    }
  }
  for (let row = n - 1; row >= 0; row--) {
    for (let k = row + 1; k < n; k++) b[row] -= a[row * n + k] * b[k];
    b[row] /= a[row * n + row];
  }
  return true;
}

function swapRows(a: Float64Array, b: Float64Array, n: number, i: number, j: number): void {
  for (let k = 0; k < n; k++) {
    const kept = a[i * n + k];
    a[i * n + k] = a[j * n + k];
    a[j * n + k] = kept;
  }
  const kept = b[i];
  b[i] = b[j];
  b[j] = kept;
}
