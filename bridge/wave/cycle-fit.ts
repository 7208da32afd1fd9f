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
  readonly #basis = new Float64Array(TERMS);
  readonly #squares: Float64Array;

  constructor(series: number) {
    this.terms = new Float64Array(series * TERMS);
    this.residual = new Float64Array(series);
    this.#squares = new Float64Array(series);
  }

  /** Fits every column of `memory` from `startS` up to `endS`. */
  fit(memory: CycleMemory, startS: number, endS: number): void {
    const first = memory.firstSince(startS);
    const end = memory.firstSince(endS);
    this.sweeps = end - first;
    this.harmonics = this.#allowed(memory, first, end, endS - startS);
    this.terms.fill(0);
    this.residual.fill(Number.NaN);
    if (this.harmonics === 0) return;
    this.#sumUp(memory, first, end, startS, endS);
    const unknowns = 2 * this.harmonics + 1;
    factor(this.#normal, unknowns);
    for (let series = 0; series < this.residual.length; series++) this.#solve(series, unknowns);
  }

  /** As many harmonics as there are sweeps for, each with two sweeps a period even in the widest hole. */
  #allowed(memory: CycleMemory, first: number, end: number, periodS: number): number {
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
  #sumUp(memory: CycleMemory, first: number, end: number, startS: number, endS: number): void {
    const normal = this.#normal;
    const basis = this.#basis;
    const squares = this.#squares;
    const { terms } = this;
    const unknowns = 2 * this.harmonics + 1;
    const { values, columns } = memory;
    normal.fill(0);
    squares.fill(0);
    basis[0] = 1;
    for (let row = first; row < end; row++) {
      const theta = (2 * Math.PI * (memory.timeOf(row) - startS)) / (endS - startS);
      for (let h = 1; h <= this.harmonics; h++) {
        basis[2 * h - 1] = Math.cos(h * theta);
        basis[2 * h] = Math.sin(h * theta);
      }
      for (let i = 0; i < unknowns; i++) {
        for (let j = 0; j <= i; j++) normal[i * TERMS + j] += basis[i] * basis[j];
      }
      const at = memory.rowAt(row);
      for (let series = 0, to = 0; series < columns; series++, to += TERMS) {
        const y = values[at + series];
        squares[series] += y * y;
        for (let i = 0; i < unknowns; i++) terms[to + i] += basis[i] * y;
      }
    }
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
