/** The cubic through four samples at uneven times, in Lagrange's form (Abramowitz & Stegun 25.2.2). */

/**
 * Writes the weights of the four samples at `time`; between the two middle ones it is an interpolation.
 * @param times four different times, from `at` on
 */
export function cubicWeights(out: Float64Array, time: number, times: Float64Array, at = 0): void {
  const t0 = times[at];
  const t1 = times[at + 1];
  const t2 = times[at + 2];
  const t3 = times[at + 3];
  const d0 = time - t0;
  const d1 = time - t1;
  const d2 = time - t2;
  const d3 = time - t3;
  out[0] = (d1 * d2 * d3) / ((t0 - t1) * (t0 - t2) * (t0 - t3));
  out[1] = (d0 * d2 * d3) / ((t1 - t0) * (t1 - t2) * (t1 - t3));
  out[2] = (d0 * d1 * d3) / ((t2 - t0) * (t2 - t1) * (t2 - t3));
  out[3] = (d0 * d1 * d2) / ((t3 - t0) * (t3 - t1) * (t3 - t2));
}
