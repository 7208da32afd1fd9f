/**
 * How uncertain inclination and heading are, and what follows for their corrections: what a clipped stretch or a gap left
 * uncertain opens them in proportion, and they close again as readings come in.
 *
 * Heading: a Kalman filter of one state (R. E. Kalman, "A New Approach to Linear Filtering and Prediction Problems", 1960)
 * above a steady deviation s. The field's direction is white noise of density s² T, T being the published time constant;
 * so a heading of which nothing is known averages the first readings, 1, 1/2, 1/3 ..., and an uncertain one takes more
 * than the published share until its variance has fallen. Beside it the gyroscope's remaining bias drifts the heading,
 * evenly, as long as no field corrects it, and clipped beats swing it, one way and back.
 *
 * Inclination: the average of the specific force is worth the more the longer it is. Above its steady part the variance
 * falls as one over the averaged time, and after the time constant as the average forgets. The steady part grows with the
 * level of the body's own acceleration, the root mean square of the specific force's difference from its average, and with what is
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
/** An average of less than the time constant, perhaps not of whole beats, is worth this much less. Ours, no source. */
const CAUTION = 3;
/** Of a rate that is predicted, this share of its size may be wrong. Ours, no source. */
const PREDICTED_SHARE = 0.2;
/** And of what its slope makes of the angle, this share: a beat turns back. Ours, no source. */
const SLOPE_SHARE = 0.4;

/**
 * A clipped stretch about a sensor axis is over: its excess was uncertain. What the shape of the beat has of that goes
 * again with the body's way back, so it is added up with its sign; a tilt, if the body is known to beat.
 */
export function leaveUncertain(r: Float64Array, axis: number, beats: boolean): void {
  const column = Slot.GYRO_AXES + axis;
  const variance = r[Slot.CLIP_VARIANCE + axis]!;
  const shape = r[Slot.CLIP_SHAPE + axis]!;
  const random = Math.max(0, variance - shape * shape);
  for (let row = 0; row < 3; row++) {
    const m = Slot.LEVEL_MATRIX + 3 * row;
    const share = r[m]! * r[column]! + r[m + 1]! * r[column + 3]! + r[m + 2]! * r[column + 6]!;
    const swings = row === 2 || beats;
    if (swings) r[Slot.SWING + row]! += shape * share;
    r[row === 2 ? Slot.HEADING_VARIANCE : Slot.TILT_VARIANCE]! +=
      (swings ? random : variance) * share * share;
  }
}

/** Variance of the direction of the specific force averaged over the time constant, rad². */
function averageVariance(r: Float64Array, { inclinationSigma, accelerationShare }: FusionParameters): number {
  const share = accelerationShare / STANDARD_GRAVITY;
  return inclinationSigma * inclinationSigma + share * share * r[Slot.ACCELERATION]!;
}

/**
 * Averages the specific force anew: the average so far counts for as long as the variance leaves it worth, seen against
 * what an average is worth at the body's level of acceleration. Much uncertainty in calm motion opens the correction
 * wide, and little in violent motion not at all.
 */
export function openInclination(r: Float64Array, parameters: FusionParameters): void {
  const { accelTauS } = parameters;
  const averagedS = Math.min(r[Slot.FORCE_LOW_PASS]!, accelTauS);
  // That a young average is worth little is no reason to begin another.
  const young = averagedS < accelTauS ? youngVariance(averagedS, parameters) : 0;
  const left = r[Slot.TILT_VARIANCE]! - young;
  if (left <= 0) return;
  const worthS = (CAUTION * averageVariance(r, parameters) * accelTauS) / left;
  if (worthS >= averagedS) return;
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
  else r[Slot.TILT_VARIANCE] = youngVariance(averagedS, parameters);
}

/** Variance of an inclination that rests on so much of averaged specific force, rad². */
function youngVariance(averagedS: number, { accelSigma, accelTauS }: FusionParameters): number {
  return (accelSigma * accelSigma * accelTauS) / averagedS;
}

/** The level of the body's acceleration follows the newest specific force. */
export function followAcceleration(r: Float64Array, gains: Float64Array): void {
  const mean = Slot.FORCE_LOW_PASS + 1;
  const x = r[Slot.INERTIAL_FORCE]! - r[mean]!;
  const y = r[Slot.INERTIAL_FORCE + 1]! - r[mean + 1]!;
  const z = r[Slot.INERTIAL_FORCE + 2]! - r[mean + 2]!;
  const share = gains[Gain.ACCELERATION]!;
  r[Slot.ACCELERATION]! += share * (x * x + y * y + z * z - r[Slot.ACCELERATION]!);
  r[Slot.SWING]! *= 1 - share;
  r[Slot.SWING + 1]! *= 1 - share;
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
  r[Slot.SWING + 2]! *= 1 - share;
}

/** Standard deviation of the inclination as it is put out, rad. */
export function inclinationSigma(r: Float64Array, aheadS: number, parameters: FusionParameters): number {
  const { accelTauS } = parameters;
  const p: number = Slot.BIAS_COVARIANCE;
  const drifted = ((r[p]! + r[p + 3]! + r[p + 5]!) / 3) * accelTauS * accelTauS;
  const swung = r[Slot.SWING]! ** 2 + r[Slot.SWING + 1]! ** 2;
  return Math.sqrt(
    Math.min(
      ANY_ANGLE,
      averageVariance(r, parameters) + drifted + r[Slot.TILT_VARIANCE]! + swung + passing(r, aheadS),
    ),
  );
}

/** Standard deviation of the heading as it is put out, rad; where no field has been read, against the start's yaw. */
export function headingSigma(
  r: Float64Array,
  aheadS: number,
  { headingSigma: steady }: FusionParameters,
): number {
  const drift = r[Slot.HEADING_DRIFT]! ** 2 + r[Slot.SWING + 2]! ** 2;
  return Math.sqrt(
    Math.min(ANY_ANGLE, steady * steady + r[Slot.HEADING_VARIANCE]! + drift + passing(r, aheadS)),
  );
}

/**
 * Has what clipping left been corrected?
 * @param magnetic whether a field corrects the heading: where none does, only the inclination can recover
 */
export function isRecovered(r: Float64Array, magnetic: boolean, parameters: FusionParameters): boolean {
  return isLevel(r, parameters) && (!magnetic || isHeadingSettled(r, parameters));
}

/** Has the inclination settled? From a start that takes one time constant. */
export function isLevel(r: Float64Array, { accelSigma }: FusionParameters): boolean {
  return r[Slot.TILT_VARIANCE]! <= accelSigma * accelSigma;
}

/** Is the heading's variance at most its steady one's double? From a start that takes one time constant. */
export function isHeadingSettled(r: Float64Array, parameters: FusionParameters): boolean {
  return r[Slot.HEADING_VARIANCE]! <= parameters.headingSigma ** 2;
}

/** Variance of what a clipped stretch not yet closed, and a prediction not yet caught up with, may have missed, rad². */
function passing(r: Float64Array, aheadS: number): number {
  if (aheadS === 0 && r[Slot.CLIP_COUNT] === 0) return 0;
  let variance = 0;
  const spanS = r[Slot.TRUE_RATE + 3]! - r[Slot.RATE_BEFORE + 3]!;
  const sloped = r[Slot.RATES_KNOWN] === 2 ? (SLOPE_SHARE * 0.5 * aheadS * aheadS) / spanS : 0;
  for (let i = 0; i < 3; i++) {
    const missed = PREDICTED_SHARE * aheadS * r[Slot.TRUE_RATE + i]!;
    const bent = sloped * (r[Slot.TRUE_RATE + i]! - r[Slot.RATE_BEFORE + i]!);
    variance += missed * missed + bent * bent;
    if (r[Slot.CLIP_COUNT] !== 0) variance += r[Slot.CLIP_VARIANCE + i]!;
  }
  return variance;
}
