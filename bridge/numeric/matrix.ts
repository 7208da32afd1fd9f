/**
 * Small dense matrices for what is worked out once, not per sweep: rows of a matrix one after the other in one array.
 * Results are new arrays.
 */

/**
 * Solves a x = b by Gaussian elimination with partial pivoting.
 * @param a n x n
 * @param b n x columns, by rows
 * @returns x, n x columns, or null where `a` is singular to rounding
 */
export function solve(a: ArrayLike<number>, b: ArrayLike<number>, n: number): Float64Array | null {
  const columns = b.length / n;
  const m = Float64Array.from(a);
  const x = Float64Array.from(b);
  const largest = m.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  for (let k = 0; k < n; k++) {
    let pivot = k;
    for (let r = k + 1; r < n; r++) if (Math.abs(m[r * n + k]!) > Math.abs(m[pivot * n + k]!)) pivot = r;
    if (!(Math.abs(m[pivot * n + k]!) > 1e-14 * largest)) return null;
    swapRows(m, n, k, pivot);
    swapRows(x, columns, k, pivot);
    for (let r = 0; r < n; r++) {
      if (r === k) continue;
      const factor = m[r * n + k]! / m[k * n + k]!;
      for (let c = k; c < n; c++) m[r * n + c]! -= factor * m[k * n + c]!;
      for (let c = 0; c < columns; c++) x[r * columns + c]! -= factor * x[k * columns + c]!;
    }
  }
  for (let r = 0; r < n; r++) for (let c = 0; c < columns; c++) x[r * columns + c]! /= m[r * n + r]!;
  return x;
}

/** The inverse of an n x n matrix, or null where it is singular to rounding. */
export function inverse(a: ArrayLike<number>, n: number): Float64Array | null {
  return solve(a, identity(n), n);
}

export function identity(n: number): Float64Array {
  return Float64Array.from({ length: n * n }, (_, i) => (i % (n + 1) === 0 ? 1 : 0));
}

/** The product of a 3 x 3 matrix and a vector. */
export function times(m: ArrayLike<number>, [x, y, z]: ArrayLike<number> & Iterable<number>): Float64Array {
  return Float64Array.from([0, 3, 6], (row) => m[row]! * x! + m[row + 1]! * y! + m[row + 2]! * z!);
}

export interface Eigen {
  /** Descending. */
  readonly values: Float64Array;
  /** vectors[k], unit length, belongs to values[k]. */
  readonly vectors: readonly Float64Array[];
}

/**
 * Eigenvalues and eigenvectors of a symmetric n x n matrix by cyclic Jacobi rotations (Golub & Van Loan, Matrix
 * Computations, section 8.5; from memory).
 */
export function symmetricEigen(a: ArrayLike<number>, n: number): Eigen {
  const m = Float64Array.from(a);
  const v = identity(n);
  for (let round = 0; round < 50 && offDiagonal(m, n) > 0; round++) {
    for (let p = 0; p < n; p++) for (let q = p + 1; q < n; q++) rotatePlane(m, v, n, p, q);
  }
  const order = Array.from({ length: n }, (_, k) => k).sort((k, l) => m[l * n + l]! - m[k * n + k]!);
  return {
    values: Float64Array.from(order, (k) => m[k * n + k]!),
    vectors: order.map((k) => Float64Array.from({ length: n }, (_, r) => v[r * n + k]!)),
  };
}

/** The largest element off the diagonal; 0 once it is rounding of the diagonal. */
function offDiagonal(m: Float64Array, n: number): number {
  let off = 0;
  let on = 0;
  for (let i = 0; i < m.length; i++) {
    if (i % (n + 1) === 0) on = Math.max(on, Math.abs(m[i]!));
    else off = Math.max(off, Math.abs(m[i]!));
  }
  return off > 1e-18 * on ? off : 0;
}

/** Turns rows and columns p and q so that their common element vanishes. */
function rotatePlane(m: Float64Array, v: Float64Array, n: number, p: number, q: number): void {
  const off = m[p * n + q]!;
  if (off === 0) return;
  const half = (m[q * n + q]! - m[p * n + p]!) / (2 * off);
  const t = (half < 0 ? -1 : 1) / (Math.abs(half) + Math.hypot(1, half));
  const c = 1 / Math.hypot(1, t);
  const s = t * c;
  for (let k = 0; k < n; k++) turn(m, k * n + p, k * n + q, c, s);
  for (let k = 0; k < n; k++) turn(m, p * n + k, q * n + k, c, s);
  for (let k = 0; k < n; k++) turn(v, k * n + p, k * n + q, c, s);
}

function turn(m: Float64Array, i: number, j: number, c: number, s: number): void {
  const a = m[i]!;
  const b = m[j]!;
  m[i] = c * a - s * b;
  m[j] = s * a + c * b;
}

function swapRows(m: Float64Array, columns: number, a: number, b: number): void {
  if (a === b) return;
  for (let c = 0; c < columns; c++) {
    const kept = m[a * columns + c]!;
    m[a * columns + c] = m[b * columns + c]!;
    m[b * columns + c] = kept;
  }
}
