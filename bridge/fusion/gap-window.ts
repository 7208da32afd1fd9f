/**
 * What a stretch of swimming, a few whole tailbeats, says about one gap's heading: how far the heading of the sensor behind
 * is turned against that of the sensor before it, more than the body is.
 *
 * Kinematics. Between two neighbours lies a piece of the midline; its second derivative is the difference of their
 * accelerations. Both come from sensors: the accelerations from specific forces, the piece from the tangents at its ends.
 * If the sensor behind is turned by a small angle d too far about the vertical, then
 *
 *     a_j - a_i - r'' = d z x (a_j - m'')
 *
 * with r the piece's chord and m the same integral weighted by the share of the way. The component across the body is
 * left out: the shape between two sensors is a guess, and its error lies there; along the body it is of second order.
 * One angle is left, found by least squares, after what is
 * slower than tailbeats has been taken off both sides. The idea of heading from joint kinematics:
 * M. Kok, J. D. Hol, T. B. Schön, IFAC Proc. Vol. 47 (2014) 79; D. Lehmann, D. Laidig, T. Seel, IFAC-PapersOnLine 53 (2020)
 * 8828 (figures from memory). There a joint is rigid and its place on both sides is known; here a bending body is between.
 *
 * Mean bend. Over whole tailbeats the gap is bent as the rig file says, more or less.
 */

/** Where things lie in a window's record: sums over time. */
export enum Sum {
  TIME = 0,
  /** Excitation h (z x (a_j - m''), along the body) and disagreement p (a_j - a_i - r'', along the body), squared. */
  HH = TIME + 1,
  HP = HH + 1,
  PP = HP + 1,
  /** What a sideways bias of the accelerometers before and behind adds to p, a unit of it: with h. */
  H_BEFORE = PP + 1,
  H_BEHIND = H_BEFORE + 1,
  /** Of the angle from the tangent before to the one behind. */
  COSINE = H_BEHIND + 1,
  SINE = COSINE + 1,
  /** The filter's own expectation of d. */
  EXPECTED = SINE + 1,
  SIZE = EXPECTED + 1,
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

/**
 * A body whose excitation is below this does not swim, m/s² RMS: twenty times an accelerometer's noise (common practice), and
 * above what errors of inclination leave of gravity in a body that only rolls.
 */
const EXCITED = 0.06;
/** Least RMS of what the midline's model leaves unexplained, m/s², and how long it stays alike, s. Ours: rehearsals. */
const LEAST_RESIDUAL = 0.01;
const ALIKE_S = 0.05;
/** Sideways bias of a calibrated accelerometer, m/s²: 10 mg, common practice, no source. */
const ACCEL_BIAS = 0.1;
/** What the straight guess between two sensors leaves along the body, rad. Ours: rehearsals stay within it. */
const MODEL = 0.01;
/** How well a mean bend is known that someone wrote into a file, rad a gap: 5°, ours, no source. */
const MEAN_BEND = 0.087;

/**
 * Evaluates a window. @param wholeBeats it spans a whole number of tailbeats
 * @param meanBend angle from the tangent before to the one behind, over whole beats, rad
 * @returns whether it measured anything
 */
export function evaluate(
  s: Float64Array,
  wholeBeats: boolean,
  meanBend: number,
  out: GapMeasurement,
): boolean {
  const timeS = s[Sum.TIME]!;
  const hh = s[Sum.HH]!;
  if (!(hh > EXCITED * EXCITED * timeS)) return false;
  const kinematic = s[Sum.HP]! / hh;
  const residual = Math.max((s[Sum.PP]! - s[Sum.HP]! * kinematic) / timeS, LEAST_RESIDUAL * LEAST_RESIDUAL);
  const before = s[Sum.H_BEFORE]! / hh;
  const behind = s[Sum.H_BEHIND]! / hh;
  const random = (residual * ALIKE_S) / hh;
  const lasting = MODEL * MODEL + ACCEL_BIAS * ACCEL_BIAS * (before * before + behind * behind);
  // Each counts by what it is worth: the inverse of its whole variance.
  const worth = 1 / (random + lasting);
  const bendWorth = wholeBeats ? 1 / (MEAN_BEND * MEAN_BEND) : 0;
  const share = worth / (worth + bendWorth);
  const bend = Math.atan2(s[Sum.SINE]!, s[Sum.COSINE]!) - meanBend;
  out.error = share * kinematic + (1 - share) * bend;
  out.random = share * share * random;
  out.lasting = share * share * lasting + (1 - share) * (1 - share) * MEAN_BEND * MEAN_BEND;
  return true;
}
