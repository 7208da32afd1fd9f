/**
 * All that changes about one sensor, in double precision. The steps of the fusion are functions that read and write this
 * record; between them nothing else is passed.
 *
 * Frames: the body axes at the sensor; the *strapdown* frame, in which the gyroscope alone would hold still, and which
 * therefore only creeps against the earth; the *level* frame, whose z axis is up; the earth, x east, y north, z up. The
 * orientation body -> earth is heading · inclination · strapdown.
 */
import { LowPass } from "../numeric/low-pass.ts";
import { setIdentity } from "../numeric/quaternion.ts";
import type { FusionParameters } from "./parameters.ts";

/** Rates kept: two on either side of a gap. */
export const RATES = 4;

export class SensorState {
  /** The sensor's own nominal interval between readings, s. */
  readonly intervalS: number;
  /** An inclination has been found, so there is an orientation. */
  started = false;

  // The newest reading, body axes.
  readonly rate = new Float64Array(3); // angular rate as calibrated, rad/s
  readonly accel = new Float64Array(3); // specific force, m/s²
  readonly mag = new Float64Array(3); // field, µT
  /** Hub time of the newest reading of each part, s, and the step it closed. */
  gyroTimeS = 0;
  accelTimeS = 0;
  magTimeS = 0;
  gyroStepS = 0;
  accelStepS = 0;
  magStepS = 0;
  magSeen = false;
  /** Hub time until which a clipped gyroscope reading is held against the orientation, s. */
  clippedUntilS = -Infinity;

  // Strapdown integration.
  /** The newest rates, bias off, rad/s, and their hub times, s; oldest first, the last `rateCount` of them known. */
  readonly rates = new Float64Array(3 * RATES);
  readonly rateTimesS = new Float64Array(RATES);
  rateCount = 0;
  /** The newest step had a gap in it, to be filled in again when the next reading has come. */
  gapRevisable = false;
  /** The strapdown quaternion before that gap. */
  readonly beforeGap = new Float64Array(4);
  /** Body axes -> strapdown frame. */
  readonly strapdown = new Float64Array(4);

  // Inclination.
  /** Specific force in the strapdown frame, m/s², and its low-pass. */
  readonly inertialAccel = new Float64Array(3);
  readonly accelLowPass = new LowPass(3);
  /** Direction of the low-passed specific force in the level frame, before it was made vertical. */
  readonly up = new Float64Array(3);
  /** Strapdown frame -> level frame. */
  readonly inclination = new Float64Array(4);
  /** Body axes -> level frame, as quaternion and as matrix by rows. */
  readonly level = new Float64Array(4);
  readonly levelMatrix = new Float64Array(9);

  // Gyroscope bias.
  readonly bias = new Float64Array(3); // rad/s, body axes
  /** Covariance of the bias, (rad/s)²: xx xy xz yy yz zz. */
  readonly biasCovariance = new Float64Array(6);
  readonly levelMatrixLowPass = new LowPass(9);
  /** Horizontal components of the bias in the level frame, rad/s, and their low-pass. */
  readonly levelBias = new Float64Array(2);
  readonly levelBiasLowPass = new LowPass(2);

  // Rest.
  atRest = false;
  restS = 0;
  readonly restRate = new LowPass(3);
  readonly restAccel = new LowPass(3);

  // Heading.
  /** Level frame -> earth about z: cosine and sine of half the angle. */
  readonly heading = new Float64Array(2);
  /** The field's horizontal and vertical components in the level frame, µT. */
  readonly levelMag = new Float64Array(3);
  /** Magnetometer readings averaged since the heading started; the average ends when the correction gain is reached. */
  headingReadings = 0;
  headingAveraged = false;
  /** Time for which a disturbed field has been ignored, s. */
  rejectionS = 0;
  /** Yaw of the nose axis to start with where there is no field, rad: east, or where it pointed before it was lost. */
  startYaw = 0;

  // Magnetic reference.
  /** Norm (µT) and dip (rad) of the field now, as read and smoothed. */
  readonly normAndDip = new Float64Array(2);
  readonly currentField = new LowPass(2);
  referenceKnown = false;
  referenceNorm = 0;
  referenceDip = 0;
  /** The health stage says of the newest reading that this is not the Earth's field. */
  fieldFlagged = false;
  /** The field is flagged, or does not match the reference, or there is no reference yet. */
  disturbed = true;
  undisturbedS = 0;
  /** A steady field that may become the reference, and for how long it has been met in motion. */
  candidateNorm = 0;
  candidateDip = 0;
  candidateS = 0;

  constructor(parameters: FusionParameters, intervalS: number) {
    this.intervalS = intervalS;
    this.reset(parameters);
  }

  /** As before the first reading. */
  reset(parameters: FusionParameters): void {
    this.loseOrientation(parameters);
    this.clippedUntilS = -Infinity;
    this.startYaw = 0;
    const variance = parameters.biasSigmaStart ** 2;
    this.bias.fill(0);
    this.biasCovariance.set([variance, 0, 0, variance, 0, variance]);
    this.referenceKnown = false;
    this.referenceNorm = 0;
    this.referenceDip = 0;
    this.candidateNorm = 0;
    this.candidateDip = 0;
  }

  /** Forgets where the body points; keeps what is the sensor's and the site's own: gyroscope bias and reference field. */
  loseOrientation(parameters: FusionParameters): void {
    this.started = false;
    this.magSeen = false;
    this.rateCount = 0;
    this.gapRevisable = false;
    for (const quaternion of [this.strapdown, this.inclination, this.level]) setIdentity(quaternion);
    this.accelLowPass.reset();
    this.levelMatrixLowPass.reset();
    this.levelBiasLowPass.reset();
    this.atRest = false;
    this.restS = 0;
    this.restRate.reset();
    this.restAccel.reset();
    this.heading.set([1, 0]);
    this.headingReadings = 0;
    this.headingAveraged = false;
    this.rejectionS = parameters.magMaxRejectionS;
    this.fieldFlagged = false;
    this.currentField.reset();
    this.disturbed = true;
    this.undisturbedS = 0;
    this.candidateS = 0;
  }
}
