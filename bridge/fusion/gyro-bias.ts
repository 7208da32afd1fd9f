/**
 * Gyroscope bias: a Kalman filter of three states, in body axes.
 *
 * At rest the low-passed angular rate is the bias. In motion the rate at which the inclination needs correcting shows
 * the horizontal part of the bias's error, seen through the level matrix with the same delay as the correction, that is
 * through the same low-pass; about the vertical there is only the weak assumption of no bias.
 *
 * Both are summed over a short span of readings, and the filter measures once a span: against its time constants of
 * seconds to minutes nothing is lost, and most of the work is saved. The three rows of a measurement have independent
 * errors, so they are taken one after the other: the same result as the matrix form, without inverting a matrix.
 */
import { stepLowPass } from "../numeric/low-pass.ts";
import { type Coefficients, Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";
import { followAcceleration } from "./uncertainty.ts";

/** The measurement matrix by rows, each row's disagreement (rad/s), and its variance ((rad/s)²). */
const seenThrough = new Float64Array(9);
const residual = new Float64Array(3);
const variance = new Float64Array(3);
const before = new Float64Array(3);

/** After each specific force: sums, and at the end of a span, after its correction of the inclination, estimates the bias. */
export function estimateBias(
  r: Float64Array,
  coefficients: Coefficients,
  parameters: FusionParameters,
): void {
  sum(r);
  if (r[Slot.SPAN]! < parameters.biasSpanS) return;
  const gains = coefficients.forStep(r, Slot.SPAN);
  followLevel(r, gains);
  followAcceleration(r, gains);
  growCovariance(r, gains, parameters);
  if (r[Slot.AT_REST] === 1) {
    measureAtRest(r, gains);
    updateBias(r, parameters);
  } else if (r[Slot.CLIPPED] === 0) {
    // Corrections that follow clipped rates would be taken for bias.
    measureInMotion(r, gains);
    updateBias(r, parameters);
  }
  for (let i: number = Slot.SPAN; i < Slot.MEAN_MATRIX; i++) r[i] = 0;
}

function sum(r: Float64Array): void {
  const stepS = r[Slot.FORCE_STEP]!;
  r[Slot.SPAN]! += stepS;
  for (let i = 0; i < 9; i++) r[Slot.SPAN_MATRIX + i]! += stepS * r[Slot.LEVEL_MATRIX + i]!;
}

/** Carries the level matrix, and the bias seen through it, through the inclination's low-pass. */
function followLevel(r: Float64Array, gains: Float64Array): void {
  const scale = 1 / r[Slot.SPAN]!;
  for (let i = 0; i < 9; i++) r[Slot.MEAN_MATRIX + i] = scale * r[Slot.SPAN_MATRIX + i]!;
  r[Slot.LEVEL_BIAS] = along(r, Slot.MEAN_MATRIX);
  r[Slot.LEVEL_BIAS + 1] = along(r, Slot.MEAN_MATRIX + 3);
  stepLowPass(r, Slot.LEVEL_LOW_PASS, 11, Slot.MEAN_MATRIX, gains, Gain.FORCE);
}

/** The bias wanders: its variance grows, up to where it started. */
function growCovariance(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  const most = parameters.biasSigmaStart * parameters.biasSigmaStart;
  for (const axis of [Slot.BIAS_COVARIANCE, Slot.BIAS_COVARIANCE + 3, Slot.BIAS_COVARIANCE + 5]) {
    if (r[axis]! < most) r[axis]! += gains[Gain.BIAS_NOISE]!;
  }
}

function measureAtRest(r: Float64Array, gains: Float64Array): void {
  for (let i = 0; i < 9; i++) seenThrough[i] = i % 4 === 0 ? 1 : 0;
  for (let i = 0; i < 3; i++) {
    residual[i] = r[Slot.REST_LOW_PASS + 1 + i]! - r[Slot.BIAS + i]!;
    variance[i] = gains[Gain.REST_VARIANCE]!;
  }
}

function measureInMotion(r: Float64Array, gains: Float64Array): void {
  const matrix = Slot.LEVEL_LOW_PASS + 1;
  const bias = matrix + 9;
  const scale = 1 / r[Slot.SPAN]!;
  for (let i = 0; i < 9; i++) seenThrough[i] = r[matrix + i]!;
  residual[0] = scale * r[Slot.SPAN_TILT]! + r[bias]! - along(r, matrix);
  residual[1] = scale * r[Slot.SPAN_TILT + 1]! + r[bias + 1]! - along(r, matrix + 3);
  residual[2] = -along(r, matrix + 6);
  variance[0] = gains[Gain.MOTION_VARIANCE]!;
  variance[1] = gains[Gain.MOTION_VARIANCE]!;
  variance[2] = gains[Gain.VERTICAL_VARIANCE]!;
}

/** Kalman update, row by row; residuals and the result are held within the bias limit. */
function updateBias(r: Float64Array, parameters: FusionParameters): void {
  const limit = parameters.biasLimit;
  const b: number = Slot.BIAS;
  const p: number = Slot.BIAS_COVARIANCE;
  for (let i = 0; i < 3; i++) before[i] = r[b + i]!;
  for (let row = 0; row < 3; row++) {
    const hx = seenThrough[3 * row]!;
    const hy = seenThrough[3 * row + 1]!;
    const hz = seenThrough[3 * row + 2]!;
    const px = r[p]! * hx + r[p + 1]! * hy + r[p + 2]! * hz;
    const py = r[p + 1]! * hx + r[p + 3]! * hy + r[p + 4]! * hz;
    const pz = r[p + 2]! * hx + r[p + 4]! * hy + r[p + 5]! * hz;
    const moved = hx * (r[b]! - before[0]!) + hy * (r[b + 1]! - before[1]!) + hz * (r[b + 2]! - before[2]!);
    const inverse = 1 / (hx * px + hy * py + hz * pz + variance[row]!);
    const gain = (clamp(residual[row]!, limit) - moved) * inverse;
    r[b]! += px * gain;
    r[b + 1]! += py * gain;
    r[b + 2]! += pz * gain;
    r[p]! -= px * px * inverse;
    r[p + 1]! -= px * py * inverse;
    r[p + 2]! -= px * pz * inverse;
    r[p + 3]! -= py * py * inverse;
    r[p + 4]! -= py * pz * inverse;
    r[p + 5]! -= pz * pz * inverse;
  }
  for (let i = b; i < b + 3; i++) r[i] = clamp(r[i]!, limit);
}

/** The bias along a row of a matrix in the record. */
function along(r: Float64Array, row: number): number {
  return r[row]! * r[Slot.BIAS]! + r[row + 1]! * r[Slot.BIAS + 1]! + r[row + 2]! * r[Slot.BIAS + 2]!;
}

function clamp(value: number, limit: number): number {
  return Math.max(-limit, Math.min(limit, value));
}
