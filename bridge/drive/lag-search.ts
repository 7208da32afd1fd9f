/**
 * Gain and lag of signals against a reference that does not repeat itself, by least squares over a window:
 *
 *     y(t) = mean + drift t + gain r(t - lag)
 *
 * The lag is first looked for on a grid, where the correlation is greatest (the least such lag, where a reference nearly
 * repeats itself), then refined by Gauss-Newton steps (Björck,
 * Numerical Methods for Least Squares Problems, from memory), the reference interpolated between its samples.
 */
import { solve } from "../numeric/linear.ts";
import type { SampleRing } from "./sample-ring.ts";

/** A lag is looked for up to this, s, either way. */
export const MOST_LAG_S = 0.5;
/** Step of the grid, s: a tenth of a cycle at 5 Hz. */
const GRID_S = 0.02;
/** A longer lag must correlate this much better than a shorter one: refining makes good what this leaves. */
const BETTER = 1.02;
/** The grid looks at no more samples than this: 50 a second of a 5 s window, ten a cycle at 5 Hz. */
const GRID_SAMPLES = 250;
/** The refinement likewise. */
const REFINED_SAMPLES = 500;
/** Gauss-Newton converges quadratically: from a grid step away it takes two or three steps. */
const MOST_STEPS = 5;
/** A step shorter than this is the last, s. */
const CLOSE_S = 1e-5;
/** Half the step of the reference's derivative, s. */
const DERIVATIVE_S = 0.005;
const TERMS = 4;

export class LagSearch {
  /** Of the signal last refined. */
  gain = Number.NaN;
  lagS = Number.NaN;
  readonly #ring: SampleRing;
  /** Reference before, at and after the lag. */
  readonly #earlier: Float64Array;
  readonly #at: Float64Array;
  readonly #later: Float64Array;
  readonly #normal = new Float64Array(TERMS * TERMS);
  readonly #terms = new Float64Array(TERMS);
  readonly #row = new Float64Array(TERMS);

  constructor(ring: SampleRing) {
    this.#ring = ring;
    this.#earlier = new Float64Array(ring.capacity);
    this.#at = new Float64Array(ring.capacity);
    this.#later = new Float64Array(ring.capacity);
  }

  /**
   * Finds, for each column of `measured`, the lag on the grid with the greatest positive correlation.
   * @param measured columns compared with the column `reference`
   * @param lagS one a column of the ring, written for those measured: NaN where nothing correlates
   */
  look(reference: number, measured: readonly number[], start: number, end: number, lagS: Float64Array): void {
    const stride = Math.ceil((end - start) / GRID_SAMPLES);
    const best = this.#later.fill(0, 0, measured.length);
    for (const column of measured) lagS[column] = Number.NaN;
    for (let i = 0; i * GRID_S <= 2 * MOST_LAG_S; i++) {
      // 0, one step late, one step early, two late ...
      const lag = GRID_S * (i % 2 === 0 ? -i / 2 : (i + 1) / 2);
      this.#ring.laggedInto(this.#at, reference, lag, start, end, stride);
      measured.forEach((column, k) => {
        const correlation = correlate(this.#ring.columns[column], this.#at, start, end, stride);
        if (!(correlation > BETTER * best[k])) return;
        best[k] = correlation;
        lagS[column] = lag;
      });
    }
  }

  /** Refines the lag of one column from where `look` found it; leaves `gain` and `lagS`, NaN where it runs away. */
  refine(reference: number, column: number, start: number, end: number, lagS: number): void {
    this.gain = Number.NaN;
    this.lagS = lagS;
    let stepS = Number.POSITIVE_INFINITY;
    for (let i = 0; i < MOST_STEPS && Math.abs(stepS) > CLOSE_S; i++) {
      stepS = this.#step(reference, this.#ring.columns[column], start, end);
      this.lagS += stepS;
      if (!(Math.abs(this.lagS) <= MOST_LAG_S + GRID_S && this.gain > 0)) {
        this.gain = Number.NaN;
        this.lagS = Number.NaN;
        return;
      }
    }
  }

  /** One least-squares step about the present lag: sets `gain`, and returns how far the lag is off, s. */
  #step(reference: number, values: Float64Array, start: number, end: number): number {
    const ring = this.#ring;
    const stride = Math.ceil((end - start) / REFINED_SAMPLES);
    ring.laggedInto(this.#earlier, reference, this.lagS + DERIVATIVE_S, start, end, stride);
    ring.laggedInto(this.#at, reference, this.lagS, start, end, stride);
    ring.laggedInto(this.#later, reference, this.lagS - DERIVATIVE_S, start, end, stride);
    const normal = this.#normal.fill(0);
    const terms = this.#terms.fill(0);
    const row = this.#row;
    const middleS = 0.5 * (ring.timeS[start] + ring.timeS[end - 1]);
    for (let i = start, k = 0; i < end; i += stride, k++) {
      row[0] = 1;
      row[1] = ring.timeS[i] - middleS;
      row[2] = this.#at[k];
      row[3] = (this.#earlier[k] - this.#later[k]) / (2 * DERIVATIVE_S);
      const value = values[i];
      if (Number.isNaN(row[2] + row[3] + value)) continue;
      for (let a = 0; a < TERMS; a++) {
        terms[a] += row[a] * value;
        for (let b = 0; b < TERMS; b++) normal[TERMS * a + b] += row[a] * row[b];
      }
    }
    const solved = solve(normal, terms, TERMS);
    this.gain = solved ? terms[2] : Number.NaN;
    return solved ? terms[3] / terms[2] : Number.NaN;
  }
}

/** Covariance over the reference's standard deviation: greatest where the correlation is, the signal being the same. */
function correlate(
  values: Float64Array,
  reference: Float64Array,
  start: number,
  end: number,
  stride: number,
): number {
  let n = 0;
  let sumY = 0;
  let sumR = 0;
  let sumYR = 0;
  let sumRR = 0;
  for (let i = start, k = 0; i < end; i += stride, k++) {
    const y = values[i];
    const r = reference[k];
    if (Number.isNaN(y + r)) continue;
    n++;
    sumY += y;
    sumR += r;
    sumYR += y * r;
    sumRR += r * r;
  }
  // Too little of the window left says nothing.
  if (2 * n * stride < end - start) return 0;
  const variance = sumRR / n - (sumR / n) ** 2;
  return variance > 0 ? (sumYR / n - (sumY / n) * (sumR / n)) / Math.sqrt(variance) : 0;
}
