/**
 * All that changes about one sensor: one flat record of doubles. The steps of the fusion are functions that read and
 * write the record; numbers pass between them through it, never as boxed values. The layout is an enum because the
 * bundler turns its members into plain numbers, which halves the time of a step.
 *
 * Frames: the body axes at the sensor; the *strapdown* frame, in which the gyroscope alone would hold still, and which
 * therefore only creeps against the earth; the *level* frame, whose z axis is up; the earth, x east, y north, z up. The
 * orientation body -> earth is heading · inclination · strapdown.
 */
import { setIdentity } from "../numeric/quaternion.ts";
import type { FusionParameters } from "./parameters.ts";

/** Readings kept of a clipped stretch, those after it included; a longer one is taken in parts. */
export const CLIP_READINGS = 128; // Slot.CLIP_RATES has the place for them

/** Variance of a heading of which nothing is known: so great that the first reading decides alone, rad². */
const UNKNOWN = 1e12;

/** Where things lie in a record. Angles in rad, times in s, rates in rad/s, forces in m/s², fields in µT; flags are 0 or 1. */
export enum Slot {
  /** There is an orientation: an inclination has been found. */
  STARTED = 0,
  /** Hub time of the sweep at hand. */
  NOW = STARTED + 1,
  /** The sensor's own nominal interval between readings. */
  INTERVAL = NOW + 1,

  /** The newest reading, body axes: angular rate as calibrated, then specific force, then field. */
  RATE = INTERVAL + 1,
  FORCE = RATE + 3,
  FIELD = FORCE + 3,
  /** Hub time of the newest reading of each, and the step that it closed. */
  RATE_TIME = FIELD + 3,
  FORCE_TIME = RATE_TIME + 1,
  FIELD_TIME = FORCE_TIME + 1,
  RATE_STEP = FIELD_TIME + 1,
  FORCE_STEP = RATE_STEP + 1,
  FIELD_STEP = FORCE_STEP + 1,
  /** A field has been read. */
  FIELD_SEEN = FIELD_STEP + 1,
  /** The gyroscope was clipped, and what that left uncertain has not been corrected yet. */
  CLIPPED = FIELD_SEEN + 1,

  /** The newest rate, bias off, and the one before it, each followed by its hub time; how many of the two are known. */
  TRUE_RATE = CLIPPED + 1,
  RATE_BEFORE = TRUE_RATE + 4,
  RATES_KNOWN = RATE_BEFORE + 4,
  /** The same of the two readings before the newest gap and the two after it; how many of those before are known. */
  GAP_RATES = RATES_KNOWN + 1,
  GAP_KNOWN = GAP_RATES + 16,
  /** The newest gap waits to be filled in again with the second reading after it. */
  GAP_OPEN = GAP_KNOWN + 1,
  /** Variance of the angle filled in, to be set against the field with the newest reading; 0: nothing to do, rad². */
  GAP_VARIANCE = GAP_OPEN + 1,
  /** Body axes -> strapdown frame, now and before the newest gap. */
  STRAPDOWN = GAP_VARIANCE + 1,
  BEFORE_GAP = STRAPDOWN + 4,

  /** Sensor axes as seen from the body, the columns of a matrix by rows; and the gyroscope's range, rad/s. */
  GYRO_AXES = BEFORE_GAP + 4,
  GYRO_RANGE = GYRO_AXES + 9,
  /** The field in the level frame, mean of a span of readings. */
  STEADY_FIELD = GYRO_RANGE + 1,
  STEADY_KNOWN = STEADY_FIELD + 3,
  /** Sensor axes of the newest reading that are clipped, as bits. */
  CLIPPED_AXES = STEADY_KNOWN + 1,
  /** Readings kept of the stretch at hand; 0: none is open. */
  CLIP_COUNT = CLIPPED_AXES + 1,
  /** The stretch's clipped axes; how many of its readings came after them; how long the clipped ones lasted. */
  CLIP_AXES = CLIP_COUNT + 1,
  CLIP_AFTER = CLIP_AXES + 1,
  CLIP_SPAN = CLIP_AFTER + 1,
  /** Those of its axes that were clipped already before it, by another stretch. */
  CLIP_JOINED = CLIP_SPAN + 1,
  /** Body axes -> strapdown frame, and in the strapdown frame the field and gravity's specific force, before the stretch. */
  BEFORE_CLIP = CLIP_JOINED + 1,
  CLIP_FIELD = BEFORE_CLIP + 4,
  CLIP_GRAVITY = CLIP_FIELD + 3,
  /** The last two rates before the stretch, each followed by its hub time, and how many of them are known. */
  CLIP_LAST = CLIP_GRAVITY + 3,
  CLIP_LAST_BUT_ONE = CLIP_LAST + 4,
  CLIP_KNOWN = CLIP_LAST_BUT_ONE + 4,
  /** By sensor axis: angle turned beyond the limit (signed), its variance, and the part of its deviation (signed) that
   *  every stretch of the same shape has. */
  CLIP_EXCESS = CLIP_KNOWN + 1,
  CLIP_VARIANCE = CLIP_EXCESS + 3,
  CLIP_SHAPE = CLIP_VARIANCE + 3,
  /** By sensor axis: what the readings after the stretch say of the excess: weights, and weighted sum. */
  CLIP_SEEN_WEIGHT = CLIP_SHAPE + 3,
  CLIP_SEEN_SUM = CLIP_SEEN_WEIGHT + 3,
  /** By sensor axis: the same of all that this stretch alone says, earlier beats left out. */
  CLIP_OWN_WEIGHT = CLIP_SEEN_SUM + 3,
  CLIP_OWN_SUM = CLIP_OWN_WEIGHT + 3,
  /** How the strapdown frame turns with the excess of one axis. */
  CLIP_LEVER = CLIP_OWN_SUM + 3,
  /** The stretch's readings: rate, bias off, and the step that it closed. */
  CLIP_RATES = CLIP_LEVER + 3,

  /** What earlier beats clipped, by sensor axis and sign of the rate; one after another as in clip-beat.ts. */
  BEATS = CLIP_RATES + 4 * 128,

  /** Specific force in the strapdown frame, and its low-pass. */
  INERTIAL_FORCE = BEATS + 6 * 6,
  FORCE_LOW_PASS = INERTIAL_FORCE + 3,
  /** Direction of the low-passed specific force in the level frame, before it was made vertical. */
  UP = FORCE_LOW_PASS + 1 + 3 * 3,
  /** Variance of the inclination above its steady one, and of the heading; what bias has drifted of the heading (rad). */
  TILT_VARIANCE = UP + 3,
  HEADING_VARIANCE = TILT_VARIANCE + 1,
  HEADING_DRIFT = HEADING_VARIANCE + 1,
  /** What the shape of clipped beats may have turned the body by, one way and back again: level frame, rad, signed. */
  SWING = HEADING_DRIFT + 1,
  /** Mean square of the specific force's difference from its average. */
  ACCELERATION = SWING + 3,
  /** Strapdown frame -> level frame. */
  INCLINATION = ACCELERATION + 1,
  /** Body axes -> level frame, as quaternion and as matrix by rows. */
  LEVEL = INCLINATION + 4,
  LEVEL_MATRIX = LEVEL + 4,

  /** Gyroscope bias, body axes, and its covariance: xx xy xz yy yz zz. */
  BIAS = LEVEL_MATRIX + 9,
  BIAS_COVARIANCE = BIAS + 3,
  /** Sums over the bias's measuring interval: time, tilt corrections about east and north, level matrix times step. */
  SPAN = BIAS_COVARIANCE + 6,
  SPAN_TILT = SPAN + 1,
  SPAN_MATRIX = SPAN_TILT + 2,
  /** Mean level matrix of the interval, the bias's horizontal components through it, and the low-pass of all eleven. */
  MEAN_MATRIX = SPAN_MATRIX + 9,
  LEVEL_BIAS = MEAN_MATRIX + 9,
  LEVEL_LOW_PASS = LEVEL_BIAS + 2,

  /** At rest; time since the last sign of motion; low-pass of rate and specific force. */
  AT_REST = LEVEL_LOW_PASS + 1 + 3 * 11,
  REST_TIME = AT_REST + 1,
  REST_LOW_PASS = REST_TIME + 1,
  /** Sums of rate and specific force for the low-pass's next step, how many, and the time that they cover. */
  REST_SUM = REST_LOW_PASS + 1 + 3 * 6,
  REST_COUNT = REST_SUM + 6,
  REST_SPAN = REST_COUNT + 1,

  /** Level frame -> earth about z: cosine and sine of half the angle. */
  HEADING = REST_SPAN + 1,
  /** Field in the level frame, summed over a span of readings; how many, and the time that they cover. */
  FIELD_SUM = HEADING + 2,
  FIELD_COUNT = FIELD_SUM + 3,
  FIELD_SPAN = FIELD_COUNT + 1,
  /** Share of the disagreement with the field that the newest reading takes away. */
  HEADING_GAIN = FIELD_SPAN + 1,
  /** Time for which a disturbed field has been ignored. */
  REJECTED_TIME = HEADING_GAIN + 1,
  /** Yaw of the nose axis to start with where there is no field: east, or where it pointed before it was lost. */
  START_YAW = REJECTED_TIME + 1,

  /** The newest field in the level frame. */
  LEVEL_FIELD = START_YAW + 1,
  /** Norm and dip of the field as just read, and their low-pass. */
  NORM_AND_DIP = LEVEL_FIELD + 3,
  FIELD_LOW_PASS = NORM_AND_DIP + 2,
  /** There is a reference field; its norm and dip. */
  REFERENCE_KNOWN = FIELD_LOW_PASS + 1 + 3 * 2,
  REFERENCE = REFERENCE_KNOWN + 1,
  /** The health stage says of the newest reading that this is not the Earth's field. */
  FIELD_FLAGGED = REFERENCE + 2,
  /** The field is flagged, or does not match the reference, or there is no reference yet. */
  DISTURBED = FIELD_FLAGGED + 1,
  UNDISTURBED_TIME = DISTURBED + 1,
  /** Norm and dip of a steady field that may become the reference, and for how long it has been met in motion. */
  CANDIDATE = UNDISTURBED_TIME + 1,
  CANDIDATE_TIME = CANDIDATE + 2,

  /** Scratch of a step: a rotation vector, a rotation. */
  TURN = CANDIDATE_TIME + 1,
  ROTATION = TURN + 3,

  SIZE = ROTATION + 4,
}

/** What outlives the loss of the orientation: it is the sensor's and the site's own. */
const LASTING: readonly (readonly [from: Slot, slots: number])[] = [
  [Slot.NOW, 1],
  [Slot.INTERVAL, 1],
  [Slot.GYRO_AXES, 9],
  [Slot.GYRO_RANGE, 1],
  [Slot.BIAS, 3],
  [Slot.BIAS_COVARIANCE, 6],
  [Slot.START_YAW, 1],
  [Slot.REFERENCE_KNOWN, 1],
  [Slot.REFERENCE, 2],
];

/**
 * A record before the first reading.
 * @param intervalS the sensor's own nominal interval between readings, s
 * @param gyroRange plus and minus this, rad/s
 * @param gyroAxes matrix by rows from the sensor's axes to the body's
 */
export function createRecord(
  parameters: FusionParameters,
  intervalS: number,
  gyroRange = Infinity,
  gyroAxes: readonly number[] = [1, 0, 0, 0, 1, 0, 0, 0, 1],
): Float64Array {
  const record = new Float64Array(Slot.SIZE);
  record[Slot.INTERVAL] = intervalS;
  record[Slot.GYRO_RANGE] = gyroRange;
  record.set(gyroAxes, Slot.GYRO_AXES);
  resetRecord(record, parameters);
  return record;
}

/** Back to before the first reading. */
export function resetRecord(r: Float64Array, parameters: FusionParameters): void {
  const variance = parameters.biasSigmaStart ** 2;
  r[Slot.NOW] = 0;
  r.fill(0, Slot.BIAS, Slot.BIAS + 3);
  r[Slot.START_YAW] = 0;
  r[Slot.REFERENCE_KNOWN] = 0;
  r.fill(0, Slot.REFERENCE, Slot.REFERENCE + 2);
  r.set([variance, 0, 0, variance, 0, variance], Slot.BIAS_COVARIANCE);
  loseOrientation(r, parameters);
}

/** Forgets where the body points and all that hangs on it; a rare step, and the only one that allocates. */
export function loseOrientation(r: Float64Array, parameters: FusionParameters): void {
  const kept = LASTING.map(([from, slots]) => r.slice(from, from + slots));
  r.fill(0);
  LASTING.forEach(([from], i) => {
    r.set(kept[i]!, from);
  });
  for (const quaternion of [Slot.STRAPDOWN, Slot.INCLINATION, Slot.LEVEL]) setIdentity(r, quaternion);
  r[Slot.HEADING] = 1;
  r[Slot.HEADING_VARIANCE] = UNKNOWN;
  r[Slot.REJECTED_TIME] = parameters.magMaxRejectionS;
  r[Slot.DISTURBED] = 1;
}
