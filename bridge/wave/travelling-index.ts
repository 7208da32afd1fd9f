/**
 * How much of a wave travels: complex orthogonal decomposition, B. F. Feeny, J. Sound Vib. 310 (2008) 77-90.
 *
 * The analytic signal of every point holds the cycle's positive harmonics; its covariance over the cycle is the sum of
 * their outer products, so that all modes lie among the harmonics' complex amplitudes, and the dominant one is found by
 * power iteration on their small matrix of inner products. The travelling index is the reciprocal of the condition number
 * of the mode's real and imaginary parts as columns of a matrix: 1 for a pure travelling wave, 0 for a standing one.
 */
import { HARMONICS, TERMS } from "./cycle-fit.ts";

/** The second harmonic's power is seldom beyond a tenth of the first's: each round gains a digit, and more are cheap. */
const ROUNDS = 30;

const SIZE = HARMONICS;
const innerRe = new Float64Array(SIZE * SIZE);
const innerIm = new Float64Array(SIZE * SIZE);
const vectorRe = new Float64Array(SIZE);
const vectorIm = new Float64Array(SIZE);
const nextRe = new Float64Array(SIZE);
const nextIm = new Float64Array(SIZE);

/**
 * @param terms of the first `points` series, as CycleFit leaves them
 * @returns 0..1; NaN where nothing moves
 */
export function travellingIndex(terms: Float64Array, points: number): number {
  innerProducts(terms, points);
  dominant();
  // Squares and product of the mode's real and imaginary parts.
  let rr = 0;
  let ii = 0;
  let ri = 0;
  for (let point = 0; point < points; point++) {
    let re = 0;
    let im = 0;
    for (let h = 0; h < SIZE; h++) {
      const c = terms[point * TERMS + 2 * h + 1];
      const s = terms[point * TERMS + 2 * h + 2];
      // The harmonic's complex amplitude is c - i s.
      re += c * vectorRe[h] + s * vectorIm[h];
      im += c * vectorIm[h] - s * vectorRe[h];
    }
    rr += re * re;
    ii += im * im;
    ri += re * im;
  }
  // The squares of the two singular values.
  const middle = (rr + ii) / 2;
  const half = Math.hypot((rr - ii) / 2, ri);
  return Math.sqrt(Math.max(0, middle - half) / (middle + half));
}

/** inner[g][h] = sum over points of conj(amplitude_g) amplitude_h. */
function innerProducts(terms: Float64Array, points: number): void {
  innerRe.fill(0);
  innerIm.fill(0);
  for (let at = 0; at < points * TERMS; at += TERMS) {
    for (let g = 0; g < SIZE; g++) {
      for (let h = 0; h < SIZE; h++) {
        const cg = terms[at + 2 * g + 1];
        const sg = terms[at + 2 * g + 2];
        const ch = terms[at + 2 * h + 1];
        const sh = terms[at + 2 * h + 2];
        innerRe[g * SIZE + h] += cg * ch + sg * sh;
        innerIm[g * SIZE + h] += sg * ch - cg * sh;
      }
    }
  }
}

/** Leaves the dominant eigenvector of the inner products in `vector`. */
function dominant(): void {
  vectorRe.fill(1);
  vectorIm.fill(0);
  for (let round = 0; round < ROUNDS; round++) {
    let square = 0;
    for (let g = 0; g < SIZE; g++) {
      let re = 0;
      let im = 0;
      for (let h = 0; h < SIZE; h++) {
        const at = g * SIZE + h;
        re += innerRe[at] * vectorRe[h] - innerIm[at] * vectorIm[h];
        im += innerRe[at] * vectorIm[h] + innerIm[at] * vectorRe[h];
      }
      nextRe[g] = re;
      nextIm[g] = im;
      square += re * re + im * im;
    }
    const over = 1 / Math.sqrt(square);
    for (let g = 0; g < SIZE; g++) {
      vectorRe[g] = nextRe[g] * over;
      vectorIm[g] = nextIm[g] * over;
    }
  }
}
