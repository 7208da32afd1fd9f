/**
 * Mean and first harmonics of many series over one cycle, by least squares: harmonic analysis that holds for sweeps
 * unevenly spaced or lost, where the sums of a discrete Fourier transform do not (for even spacing over the whole cycle
 * they are the same).
 *
 *     y(t) = m + sum over h of c_h cos(h theta) + s_h sin(h theta),  theta = 2 pi (t - start) / (end - start)
 */
import type { CycleMemory } from "./cycle-memory.ts";

/** A tail that beats in water has little beyond the third. */
export const HARMONICS = 3;
/** Mean, and cosine and sine of every harmonic. */
export const TERMS = 2 * HARMONICS + 1;
/** Sweeps for every unknown's pair, at least: fewer would pass the noise off as motion. */
const SWEEPS_A_HARMONIC = 3;

export class CycleFit {
  /** TERMS a series: m, c_1, s_1, c_2, s_2, ...; 0 where a harmonic was not fitted. */
  readonly terms: Float64Array;
  /** RMS of what is left of each series, by its degrees of freedom. */
  readonly residual: Float64Array;
  /** Harmonics that the sweeps allowed: 0 is no fit. */
  harmonics = 0;
  sweeps = 0;
  readonly #normal = new Float64Array(TERMS * TERMS);
  readonly #memory: CycleMemory;
  /** TERMS a sweep of the cycle: 1, cos, sin, ...; 0 where a harmonic is not fitted. */
  readonly #basis: Float64Array;
  readonly #squares: Float64Array;

  /** @param memory whose columns are fitted */
  constructor(memory: CycleMemory) {
    const series = memory.columns;
    this.#memory = memory;
    this.#basis = new Float64Array(memory.capacity * TERMS);
    this.terms = new Float64Array(series * TERMS);
    this.residual = new Float64Array(series);
    this.#squares = new Float64Array(series);
  }

  /** Fits every column from `startS` up to `endS`. */
  fit(startS: number, endS: number): void {
    const memory = this.#memory;
    const first = memory.firstSince(startS);
    const end = memory.firstSince(endS);
    this.sweeps = end - first;
    this.harmonics = this.#allowed(first, end, endS - startS);
    this.terms.fill(0);
    this.residual.fill(Number.NaN);
    if (this.harmonics === 0) return;
    this.#sumUp(first, end, startS, endS);
    const unknowns = 2 * this.harmonics + 1;
    factor(this.#normal, unknowns);
    for (let series = 0; series < this.residual.length; series++) this.#solve(series, unknowns);
  }

  /** As many harmonics as there are sweeps for, each with two sweeps a period even in the widest hole. */
  #allowed(first: number, end: number, periodS: number): number {
    const memory = this.#memory;
    // The sweeps before the cycle and behind it bound the holes at its ends.
    if (end <= first || first <= memory.oldest) return 0;
    let widestS = 0;
    for (let row = first; row <= end; row++) {
      widestS = Math.max(widestS, memory.timeOf(row) - memory.timeOf(row - 1));
    }
    const byHole = Math.floor(periodS / (2 * widestS));
    return Math.min(HARMONICS, byHole, Math.floor((end - first - 1) / SWEEPS_A_HARMONIC));
  }

  /** The normal equations: their matrix, and their right-hand sides in `terms`. */
  #sumUp(first: number, end: number, startS: number, endS: number): void {
    const memory = this.#memory;
    const normal = this.#normal;
    const basis = this.#basis;
    const unknowns = 2 * this.harmonics + 1;
    normal.fill(0);
    basis.fill(0, 0, (end - first) * TERMS);
    for (let row = first, b = 0; row < end; row++, b += TERMS) {
      const theta = (2 * Math.PI * (memory.timeOf(row) - startS)) / (endS - startS);
      basis[b] = 1;
      for (let h = 1; h <= this.harmonics; h++) {
        basis[b + 2 * h - 1] = Math.cos(h * theta);
        basis[b + 2 * h] = Math.sin(h * theta);
      }
      for (let i = 0; i < unknowns; i++) {
        for (let j = 0; j <= i; j++) normal[i * TERMS + j] += basis[b + i] * basis[b + j];
      }
    }
    for (let series = 0; series < memory.columns; series++) this.#sumSeries(first, end, series);
  }

  /** Written out, so that the sums need not be stored at every sweep: this is the most of a cycle's work. */
  #sumSeries(first: number, end: number, series: number): void {
    const memory = this.#memory;
    const { values, columns } = memory;
    const basis = this.#basis;
    let square = 0;
    let m = 0;
    let c1 = 0;
    let s1 = 0;
    let c2 = 0;
    let s2 = 0;
    let c3 = 0;
    let s3 = 0;
    let at = memory.rowAt(first) + series;
    for (let b = 0; b < (end - first) * TERMS; b += TERMS) {
      const y = values[at];
      square += y * y;
      m += y;
      c1 += basis[b + 1] * y;
      s1 += basis[b + 2] * y;
      c2 += basis[b + 3] * y;
      s2 += basis[b + 4] * y;
      c3 += basis[b + 5] * y;
      s3 += basis[b + 6] * y;
      at += columns;
      if (at >= values.length) at -= values.length;
    }
    this.#squares[series] = square;
    this.terms.set([m, c1, s1, c2, s2, c3, s3], series * TERMS);
  }

  #solve(series: number, unknowns: number): void {
    const { terms } = this;
    const l = this.#normal;
    const at = series * TERMS;
    let explained = 0;
    for (let i = 0; i < unknowns; i++) {
      let sum = terms[at + i];
      for (let j = 0; j < i; j++) sum -= l[i * TERMS + j] * terms[at + j];
      terms[at + i] = sum / l[i * TERMS + i];
      explained += terms[at + i] * terms[at + i];
    }
    for (let i = unknowns - 1; i >= 0; i--) {
      let sum = terms[at + i];
      for (let j = i + 1; j < unknowns; j++) sum -= l[j * TERMS + i] * terms[at + j];
      terms[at + i] = sum / l[i * TERMS + i];
    }
    const left = Math.max(0, this.#squares[series] - explained);
    this.residual[series] = Math.sqrt(left / (this.sweeps - unknowns));
  }
}

/** Cholesky's factor, lower triangle, in place. */
function factor(matrix: Float64Array, size: number): void {
  for (let i = 0; i < size; i++) {
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i * TERMS + j];
      for (let k = 0; k < j; k++) sum -= matrix[i * TERMS + k] * matrix[j * TERMS + k];
      matrix[i * TERMS + j] = i === j ? Math.sqrt(sum) : sum / matrix[j * TERMS + j];
    }
  }
}
