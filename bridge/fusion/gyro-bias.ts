/**
 * Gyroscope bias: a Kalman filter of three states, in body axes.
 *
 * At rest the low-passed angular rate is the bias. In motion the rate at which the inclination needs correcting shows
 * the horizontal part of the bias's error, seen through the level matrix with the same delay as the correction, that is
 * through the same low-pass; about the vertical there is only the weak assumption of no bias.
 *
 * The three rows of a measurement have independent errors, so they are taken one after the other: the same result as the
 * matrix form, without inverting a matrix.
 */
import type { StepGains } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import type { SensorState } from "./sensor-state.ts";

const IDENTITY = Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1);
/** Disagreement of each row, rad/s, and its variance, (rad/s)². */
const residual = new Float64Array(3);
const variance = new Float64Array(3);
const before = new Float64Array(3);

/**
 * One step, after the inclination correction.
 * @param believable false: the newest corrections come from faulty rates; the covariance grows, and only rest is measured
 */
export function estimateBias(
  state: SensorState,
  gains: StepGains,
  parameters: FusionParameters,
  believable: boolean,
): void {
  followLevel(state, gains);
  grow(state, gains, parameters);
  if (state.atRest) {
    measureAtRest(state, gains);
    update(state, IDENTITY, parameters);
  } else if (believable) {
    measureInMotion(state, gains);
    update(state, state.levelMatrixLowPass.value, parameters);
  }
}

/** Carries the level matrix, and the bias seen through it, through the inclination's low-pass. */
export function followLevel(state: SensorState, gains: StepGains): void {
  const { levelMatrix: m, levelBias, bias } = state;
  levelBias[0] = m[0]! * bias[0]! + m[1]! * bias[1]! + m[2]! * bias[2]!;
  levelBias[1] = m[3]! * bias[0]! + m[4]! * bias[1]! + m[5]! * bias[2]!;
  state.levelMatrixLowPass.step(gains.accel, m);
  state.levelBiasLowPass.step(gains.accel, levelBias);
}

/** The bias wanders: its variance grows, up to where it started. */
function grow(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const p = state.biasCovariance;
  const most = parameters.biasSigmaStart ** 2;
  if (p[0]! < most) p[0]! += gains.biasNoise;
  if (p[3]! < most) p[3]! += gains.biasNoise;
  if (p[5]! < most) p[5]! += gains.biasNoise;
}

function measureAtRest(state: SensorState, gains: StepGains): void {
  for (let i = 0; i < 3; i++) residual[i] = state.restRate.value[i]! - state.bias[i]!;
  variance.fill(gains.restVariance);
}

function measureInMotion(state: SensorState, gains: StepGains): void {
  const { up, bias, accelStepS } = state;
  const m = state.levelMatrixLowPass.value;
  const seen = state.levelBiasLowPass.value;
  residual[0] = -up[1]! / accelStepS + seen[0]! - (m[0]! * bias[0]! + m[1]! * bias[1]! + m[2]! * bias[2]!);
  residual[1] = up[0]! / accelStepS + seen[1]! - (m[3]! * bias[0]! + m[4]! * bias[1]! + m[5]! * bias[2]!);
  residual[2] = -(m[6]! * bias[0]! + m[7]! * bias[1]! + m[8]! * bias[2]!);
  variance[0] = gains.motionVariance;
  variance[1] = gains.motionVariance;
  variance[2] = gains.verticalVariance;
}

/** Kalman update with the measurement matrix h (3 x 3, by rows); residuals and result are held within the bias limit. */
function update(state: SensorState, h: Float64Array, parameters: FusionParameters): void {
  const { bias, biasCovariance: p } = state;
  const limit = parameters.biasLimit;
  before.set(bias);
  for (let row = 0; row < 3; row++) {
    const hx = h[3 * row]!;
    const hy = h[3 * row + 1]!;
    const hz = h[3 * row + 2]!;
    const px = p[0]! * hx + p[1]! * hy + p[2]! * hz;
    const py = p[1]! * hx + p[3]! * hy + p[4]! * hz;
    const pz = p[2]! * hx + p[4]! * hy + p[5]! * hz;
    const moved = hx * (bias[0]! - before[0]!) + hy * (bias[1]! - before[1]!) + hz * (bias[2]! - before[2]!);
    const inverse = 1 / (hx * px + hy * py + hz * pz + variance[row]!);
    const gain = (clamp(residual[row]!, limit) - moved) * inverse;
    bias[0]! += px * gain;
    bias[1]! += py * gain;
    bias[2]! += pz * gain;
    p[0]! -= px * px * inverse;
    p[1]! -= px * py * inverse;
    p[2]! -= px * pz * inverse;
    p[3]! -= py * py * inverse;
    p[4]! -= py * pz * inverse;
    p[5]! -= pz * pz * inverse;
  }
  for (let i = 0; i < 3; i++) bias[i] = clamp(bias[i]!, limit);
}

function clamp(value: number, limit: number): number {
  return Math.max(-limit, Math.min(limit, value));
}
