/**
 * Fourier coefficients at the fundamental over whole cycles, by least squares:
 *
 *     y(t) = mean + drift t + cosine cos(w t) + sine sin(w t)
 *
 * On even samples over whole cycles these are the classical coefficients (Bracewell, The Fourier Transform and Its
 * Applications, from memory); by least squares they stay free of bias where samples are uneven or lost, and a slow drift
 * does not leak into them.
 */
import { solve } from "../numeric/linear.ts";

const TERMS = 4;

export class Fundamental {
  /** Mean, drift per s, cosine and sine as of the last fit; the window's middle is t = 0. */
  readonly terms = new Float64Array(TERMS);
  /** rad/s. */
  omega = 0;
  middleS = 0;
  #timeS: Float64Array = new Float64Array(0);
  #start = 0;
  #end = 0;
  readonly #cosine: Float64Array;
  readonly #sine: Float64Array;
  readonly #normal = new Float64Array(TERMS * TERMS);
  readonly #scratch = new Float64Array(TERMS * TERMS);
  readonly #row = new Float64Array(TERMS);

  /** @param capacity the most samples of a window */
  constructor(capacity: number) {
    this.#cosine = new Float64Array(capacity);
    this.#sine = new Float64Array(capacity);
  }

  /** Sets the window [start, end) of `timeS` and the frequency; what all signals of a window have in common. */
  prepare(timeS: Float64Array, start: number, end: number, omega: number): void {
    this.#timeS = timeS;
    this.#start = start;
    this.#end = end;
    this.omega = omega;
    this.middleS = 0.5 * (timeS[start] + timeS[end - 1]);
    const normal = this.#normal.fill(0);
    const row = this.#row;
    for (let i = start; i < end; i++) {
      const t = timeS[i] - this.middleS;
      this.#cosine[i - start] = Math.cos(omega * t);
      this.#sine[i - start] = Math.sin(omega * t);
      this.#setRow(row, i);
      for (let a = 0; a < TERMS; a++)
        for (let b = 0; b < TERMS; b++) normal[TERMS * a + b] += row[a] * row[b];
    }
  }

  /** Fits one signal; `terms` are NaN where a sample is missing or there are too few. */
  fit(values: Float64Array): void {
    const { terms } = this;
    const row = this.#row;
    terms.fill(0);
    for (let i = this.#start; i < this.#end; i++) {
      this.#setRow(row, i);
      const value = values[i];
      for (let a = 0; a < TERMS; a++) terms[a] += row[a] * value;
    }
    this.#scratch.set(this.#normal);
    if (!solve(this.#scratch, terms, TERMS)) terms.fill(Number.NaN);
  }

  #setRow(row: Float64Array, i: number): void {
    row[0] = 1;
    row[1] = this.#timeS[i] - this.middleS;
    row[2] = this.#cosine[i - this.#start];
    row[3] = this.#sine[i - this.#start];
  }
}
