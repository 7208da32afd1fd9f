/**
 * What a stretch of swimming, a few whole tailbeats, says about one gap's heading: how far the heading of the sensor behind
 * is turned against that of the sensor before it, more than the body is.
 *
 * Kinematics. Between two neighbours lies a piece of the midline; its second derivative is the difference of their
 * accelerations. Both come from sensors: the accelerations from specific forces, the piece from the tangents at its ends.
 * If the sensor behind is turned by a small angle d too far about the vertical, then
 *
 *     a_j - a_i - r'' = d z x (a_j - m'') + b_j z x t_j - b_i z x t_i
 *
 * with r the piece's chord and m the same integral weighted by the share of the way, and with b the accelerometers' biases
 * across the tangents t. The component across the body is left out: the shape between two sensors is a guess, and its error
 * lies there; along the body the piece is taken for an arc, and what that leaves is of higher order. One angle is left,
 * found by least squares, after what is slower than tailbeats has been taken off both sides; what is left of the
 * disagreement tells of the biases (sideways-bias.ts). The idea of heading from joint kinematics:
 * M. Kok, J. D. Hol, T. B. Schön, IFAC Proc. Vol. 47 (2014) 79; D. Lehmann, D. Laidig, T. Seel, IFAC-PapersOnLine 53 (2020)
 * 8828 (figures from memory). There a joint is rigid and its place on both sides is known; here a bending body is between.
 *
 * Mean bend. Over whole tailbeats the gap is bent as the rig file says, more or less.
 */
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import { Motion, SLOW_S, TAU_S } from "./sensor-motion.ts";

/** Where things lie in a window's record: what it spans, what goes on from window to window, and sums over time. */
export enum Window {
  /** Between the two sensors, m; angle from the tangent before to the one behind, over whole beats, rad. */
  LENGTH = 0,
  MEAN_BEND = LENGTH + 1,
  /** Time since motion was last added, s, and the filter's own expectation of d, rad. */
  STEP = MEAN_BEND + 1,
  ERROR = STEP + 1,
  /** Slow mean of what the arc adds, and the excitation as last seen. */
  ARC = ERROR + 1,
  EXCITATION = ARC + 1,
  /** Sums from here on. */
  TIME = EXCITATION + 1,
  BEATS = TIME + 1,
  EXPECTED = BEATS + 1,
  /** Of the angle from the tangent before to the one behind. */
  COSINE = EXPECTED + 1,
  SINE = COSINE + 1,
  /**
   * Products along the body: excitation h (z x (a_j - m'')), disagreement p (a_j - a_i - r''), and what a bias of the
   * accelerometer before and of the one behind adds to it, a unit of it (i, j).
   */
  HH = SINE + 1,
  HP = HH + 1,
  PP = HP + 1,
  HI = PP + 1,
  HJ = HI + 1,
  PI = HJ + 1,
  PJ = PI + 1,
  II = PJ + 1,
  IJ = II + 1,
  JJ = IJ + 1,
  SIZE = JJ + 1,
}

/** What a window measured; angles in rad. */
export interface GapMeasurement {
  /** Angle by which the sensor behind is turned too far. */
  error: number;
  /** Variance that averages out from window to window. */
  random: number;
  /** Variance of what stays as long as the body swims as it does. */
  lasting: number;
}

/** Of the biases of two accelerometers across the body, m/s²: the part of p that they make in h, and its variance. */
export interface BiasShare {
  angle: number;
  variance: number;
}

/**
 * A body whose excitation is below this does not swim, m/s² RMS: twenty times an accelerometer's noise (common practice), and
 * above what errors of inclination leave of gravity in a body that only rolls.
 */
const EXCITED = 0.06;
/** Least RMS of what the midline's model leaves unexplained, m/s², and how long it stays alike, s. Ours: rehearsals. */
const LEAST_RESIDUAL = 0.01;
export const ALIKE_S = 0.05;
/** What the arc between two sensors leaves along the body, rad. Ours: rehearsals stay within it. */
const MODEL = 0.01;
/** What the fusion leaves of a gyroscope's bias that wanders by half a degree a second, rad/s: 0.3 °/s. Ours: rehearsals. */
const GYRO_BIAS = 0.3 * RAD_PER_DEG;
/** How well a mean bend is known that someone wrote into a file, rad a gap: 5°, ours, no source. */
const MEAN_BEND = 0.087;

/**
 * Adds the newest motion of the sensors before and behind to the window.
 * @returns whether a beat begins: the excitation rises through zero
 */
export function addMotion(s: Float64Array, i: Float64Array, j: Float64Array): boolean {
  const stepS = s[Window.STEP]!;
  const lengthM = s[Window.LENGTH]!;
  const ix = i[Motion.TANGENT]!;
  const iy = i[Motion.TANGENT + 1]!;
  const jx = j[Motion.TANGENT]!;
  const jy = j[Motion.TANGENT + 1]!;
  const scale = 1 / Math.sqrt((ix + jx) * (ix + jx) + (iy + jy) * (iy + jy));
  const cx = scale * (ix + jx);
  const cy = scale * (iy + jy);
  const iddx = i[Motion.TANGENT_RATE_OF_RATE]!;
  const iddy = i[Motion.TANGENT_RATE_OF_RATE + 1]!;
  const jddx = j[Motion.TANGENT_RATE_OF_RATE]!;
  const jddy = j[Motion.TANGENT_RATE_OF_RATE + 1]!;
  const jax = j[Motion.ACCELERATION]!;
  const jay = j[Motion.ACCELERATION + 1]!;
  // An arc's chord is longer than the mean of its end tangents, by a twelfth of the square of their angle.
  const sine = ix * jy - iy * jx;
  const rate =
    (i[Motion.TANGENT_SLOPE]! * jy -
      i[Motion.TANGENT_SLOPE + 1]! * jx +
      (ix * j[Motion.TANGENT_SLOPE + 1]! - iy * j[Motion.TANGENT_SLOPE]!)) *
    (1 / TAU_S);
  const rateOfRate =
    iddx * jy -
    iddy * jx +
    (ix * jddy - iy * jddx) +
    (2 / (TAU_S * TAU_S)) *
      (i[Motion.TANGENT_SLOPE]! * j[Motion.TANGENT_SLOPE + 1]! -
        i[Motion.TANGENT_SLOPE + 1]! * j[Motion.TANGENT_SLOPE]!);
  let arc = (lengthM / 6) * (rate * rate + sine * rateOfRate);
  arc -= s[Window.ARC]! += Math.min(1, stepS / SLOW_S) * (arc - s[Window.ARC]!);
  // The tangents point to the nose, so r is against them.
  const px = jax - i[Motion.ACCELERATION]! + 0.5 * lengthM * (iddx + jddx);
  const py = jay - i[Motion.ACCELERATION + 1]! + 0.5 * lengthM * (iddy + jddy);
  const hx = jax + lengthM * (iddx / 6 + jddx / 3);
  const hy = jay + lengthM * (iddy / 6 + jddy / 3);
  const p = cx * px + cy * py + arc;
  const h = cy * hx - cx * hy;
  const before = cy * i[Motion.SWING]! - cx * i[Motion.SWING + 1]!;
  const behind = cy * j[Motion.SWING]! - cx * j[Motion.SWING + 1]!;
  s[Window.TIME]! += stepS;
  s[Window.EXPECTED]! += stepS * s[Window.ERROR]!;
  s[Window.COSINE]! += stepS * (ix * jx + iy * jy);
  s[Window.SINE]! += stepS * sine;
  s[Window.HH]! += stepS * h * h;
  s[Window.HP]! += stepS * h * p;
  s[Window.PP]! += stepS * p * p;
  s[Window.HI]! += stepS * h * before;
  s[Window.HJ]! += stepS * h * behind;
  s[Window.PI]! += stepS * p * before;
  s[Window.PJ]! += stepS * p * behind;
  s[Window.II]! += stepS * before * before;
  s[Window.IJ]! += stepS * before * behind;
  s[Window.JJ]! += stepS * behind * behind;
  s[Window.STEP] = 0;
  const beat = h >= 0 && s[Window.EXCITATION]! < 0;
  if (beat) s[Window.BEATS]! += 1;
  s[Window.EXCITATION] = h;
  return beat;
}

/** Begins a new window. */
export function clearSums(s: Float64Array): void {
  s.fill(0, Window.TIME);
}

/** Whether the body swam in this window, so that it says anything. */
export function isExcited(s: Float64Array): boolean {
  return s[Window.HH]! > EXCITED * EXCITED * s[Window.TIME]!;
}

/** Mean square of the disagreement that no angle explains, (m/s²)². */
export function residualOf(s: Float64Array): number {
  const left = s[Window.PP]! - (s[Window.HP]! * s[Window.HP]!) / s[Window.HH]!;
  return Math.max(left / s[Window.TIME]!, LEAST_RESIDUAL * LEAST_RESIDUAL);
}

/**
 * Mean square of what gravity adds to the disagreement, (m/s²)²: while the tangent swings, the gyroscope's bias along it
 * rocks the vertical, by its integral over the swing.
 */
export function leakOf(s: Float64Array): number {
  const timeS = s[Window.TIME]!;
  const tilt = (GYRO_BIAS * timeS) / (2 * Math.PI * Math.max(1, s[Window.BEATS]!));
  return (STANDARD_GRAVITY * tilt) ** 2 * ((s[Window.II]! + s[Window.JJ]!) / timeS);
}

/**
 * Evaluates a window in which the body swam.
 * @param wholeBeats it spans a whole number of tailbeats
 * @param bias of the accelerometers
 */
export function evaluate(s: Float64Array, wholeBeats: boolean, bias: BiasShare, out: GapMeasurement): void {
  const hh = s[Window.HH]!;
  const kinematic = s[Window.HP]! / hh - bias.angle;
  const random = (residualOf(s) * ALIKE_S) / hh;
  const lasting = MODEL * MODEL + bias.variance + (leakOf(s) * s[Window.TIME]!) / hh;
  // Each counts by what it is worth: the inverse of its whole variance.
  const worth = 1 / (random + lasting);
  const bendWorth = wholeBeats ? 1 / (MEAN_BEND * MEAN_BEND) : 0;
  const share = worth / (worth + bendWorth);
  const bend = Math.atan2(s[Window.SINE]!, s[Window.COSINE]!) - s[Window.MEAN_BEND]!;
  out.error = share * kinematic + (1 - share) * bend;
  out.random = share * share * random;
  out.lasting = share * share * lasting + (1 - share) * (1 - share) * MEAN_BEND * MEAN_BEND;
}
