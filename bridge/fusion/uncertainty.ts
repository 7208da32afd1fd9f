/**
 * How uncertain inclination and heading are, and what follows for their corrections: what a clipped stretch or a gap left
 * uncertain opens them in proportion, and they close again as readings come in.
 *
 * Heading: a Kalman filter of one state (R. E. Kalman, "A New Approach to Linear Filtering and Prediction Problems", 1960)
 * above a steady deviation s. The field's direction is white noise of density s² T, T being the published time constant;
 * so a heading of which nothing is known averages the first readings, 1, 1/2, 1/3 ..., and an uncertain one takes more
 * than the published share until its variance has fallen. Beside it the gyroscope's remaining bias drifts the heading,
 * evenly, as long as no field corrects it.
 *
 * Inclination: the average of the specific force is worth the more the longer it is. Above its steady part the variance
 * falls as one over the averaged time, and after the time constant as the average forgets. The steady part grows with the
 * level of the body's own acceleration, the root mean square of the specific force's norm less gravity, and with what is
 * not known of the gyroscope's bias, which tilts for one time constant before it is corrected.
 */
import { STANDARD_GRAVITY } from "../numeric/units.ts";
import { Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** Variance of an angle that could be anything, rad². */
const ANY_ANGLE = (Math.PI * Math.PI) / 3;
/** A variance below this, rad², is left as it is: it would fade into numbers too small to reckon with fast. */
const NEGLIGIBLE = 1e-12;
/** Of a rate that is predicted, this share of its size may be wrong. Ours, no source. */
const PREDICTED_SHARE = 0.2;

/** The body turned about a body axis (unit vector) by an unknown angle of this variance, rad². */
export function addVariance(r: Float64Array, variance: number, x: number, y: number, z: number): void {
  const up = Slot.LEVEL_MATRIX + 6;
  const vertical = r[up]! * x + r[up + 1]! * y + r[up + 2]! * z;
  r[Slot.HEADING_VARIANCE]! += variance * vertical * vertical;
  r[Slot.TILT_VARIANCE]! += variance * (1 - vertical * vertical);
}

/** Averages the specific force anew: the average so far counts for as long as the variance leaves it worth. */
export function openInclination(r: Float64Array, parameters: FusionParameters): void {
  const { accelSigma, accelTauS } = parameters;
  const worthS = (accelSigma * accelSigma * accelTauS) / r[Slot.TILT_VARIANCE]!;
  if (worthS >= Math.min(r[Slot.FORCE_LOW_PASS]!, accelTauS)) return;
  const slope = Slot.FORCE_LOW_PASS + 4;
  r[Slot.FORCE_LOW_PASS] = worthS;
  for (let i = 0; i < 3; i++) r[slope + i] = 0;
}

/** The average of the specific force has grown by a reading. */
export function narrowInclination(r: Float64Array, parameters: FusionParameters): void {
  const variance = r[Slot.TILT_VARIANCE]!;
  const averagedS = Math.min(r[Slot.FORCE_LOW_PASS]!, parameters.accelTauS);
  if (variance < NEGLIGIBLE && averagedS === parameters.accelTauS) return;
  const share = r[Slot.FORCE_STEP]! / averagedS;
  if (share < 1) r[Slot.TILT_VARIANCE] = (1 - share) * variance;
  else r[Slot.TILT_VARIANCE] = (parameters.accelSigma ** 2 * parameters.accelTauS) / averagedS;
}

/** The level of the body's acceleration follows the newest specific force. */
export function followAcceleration(r: Float64Array, gains: Float64Array): void {
  const x = r[Slot.FORCE]!;
  const y = r[Slot.FORCE + 1]!;
  const z = r[Slot.FORCE + 2]!;
  const beyond = Math.sqrt(x * x + y * y + z * z) - STANDARD_GRAVITY;
  r[Slot.ACCELERATION]! += gains[Gain.ACCELERATION]! * (beyond * beyond - r[Slot.ACCELERATION]!);
}

/** The share of its disagreement with the field that an uncertain heading should take. */
export function uncertainShare(r: Float64Array, gains: Float64Array): number {
  const variance = r[Slot.HEADING_VARIANCE]!;
  return variance / (variance + gains[Gain.HEADING_NOISE]!);
}

/** The heading takes a share of its disagreement with the field. */
export function narrowHeading(r: Float64Array, share: number): void {
  if (r[Slot.HEADING_VARIANCE]! > NEGLIGIBLE) r[Slot.HEADING_VARIANCE]! *= 1 - share;
  r[Slot.HEADING_DRIFT]! *= 1 - share;
}

/** Standard deviation of the inclination as it is put out, rad. */
export function inclinationSigma(r: Float64Array, aheadS: number, parameters: FusionParameters): number {
  const { inclinationSigma: steady, accelerationShare, accelTauS } = parameters;
  const p: number = Slot.BIAS_COVARIANCE;
  const drifted = ((r[p]! + r[p + 3]! + r[p + 5]!) / 3) * accelTauS * accelTauS;
  const moved = (accelerationShare / STANDARD_GRAVITY) ** 2 * r[Slot.ACCELERATION]!;
  return Math.sqrt(
    Math.min(ANY_ANGLE, steady * steady + moved + drifted + r[Slot.TILT_VARIANCE]! + passing(r, aheadS)),
  );
}

/** Standard deviation of the heading as it is put out, rad; where no field has been read, against the start's yaw. */
export function headingSigma(
  r: Float64Array,
  aheadS: number,
  { headingSigma: steady }: FusionParameters,
): number {
  const drift = r[Slot.HEADING_DRIFT]!;
  return Math.sqrt(
    Math.min(ANY_ANGLE, steady * steady + r[Slot.HEADING_VARIANCE]! + drift * drift + passing(r, aheadS)),
  );
}

/**
 * Has what clipping left been corrected, so far that no more is left of it than is always there?
 * @param magnetic whether a field corrects the heading: where none does, only the inclination can recover
 */
export function isRecovered(r: Float64Array, magnetic: boolean, parameters: FusionParameters): boolean {
  const level = r[Slot.TILT_VARIANCE]! <= parameters.accelSigma ** 2;
  return level && (!magnetic || isHeadingSettled(r, parameters));
}

/** Is the heading's variance at most its steady one's double? From a start that takes one time constant. */
export function isHeadingSettled(r: Float64Array, parameters: FusionParameters): boolean {
  return r[Slot.HEADING_VARIANCE]! <= parameters.headingSigma ** 2;
}

/** Variance of what a clipped stretch not yet closed, and a prediction not yet caught up with, may have missed, rad². */
function passing(r: Float64Array, aheadS: number): number {
  if (aheadS === 0 && r[Slot.CLIP_COUNT] === 0) return 0;
  let variance = 0;
  for (let i = 0; i < 3; i++) {
    const missed = PREDICTED_SHARE * aheadS * r[Slot.TRUE_RATE + i]!;
    variance += missed * missed;
    if (r[Slot.CLIP_COUNT] !== 0) variance += r[Slot.CLIP_VARIANCE + i]!;
  }
  return variance;
}
