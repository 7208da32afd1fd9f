/**
 * How far each sensor's magnetic field is from the reference: norm and dip together, as the distance between measured and
 * reference field in the plane of horizontal and downward part, over the reference's norm. The vertical comes from the
 * sensor's orientation, and what its stated uncertainty explains is no difference in dip; heading plays no part.
 *
 * The vertical of a sensor that was clipped, stuck, unread or away for a while cannot be believed until the orientation
 * filter has found it again: for DOUBT_S the norm alone is compared, which needs no vertical.
 */
import { CHANNELS, CONDITION, HAS_INERTIAL, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import type { FieldReference } from "./field-reference.ts";

/** Low-pass, s: a tenth of a beat's noise is left, and a magnet is still seen within a few readings. */
const SMOOTHING_S = 0.15;
/** Inclination is corrected from specific force with a time constant of about 3 s: after four of them 2 % is left. */
const DOUBT_S = 12;
/** Without gyro and accelerometer for longer than this the vertical drifts off, s. */
const BRIDGED_S = 0.2;
/** The vertical may be off by so many of its standard deviations. */
const SIGMAS = 2;
const DOUBTFUL = CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;

export class FieldMeter {
  /** Share of the reference's norm, per sensor; NaN without magnetometer or reference. */
  readonly off: Float64Array;
  /** Smoothed, µT, per sensor; the parts hang on the vertical. */
  readonly norm: Float64Array;
  readonly horizontal: Float64Array;
  readonly down: Float64Array;
  readonly #reference: FieldReference;
  readonly #lastMagS: Float64Array;
  readonly #lastInertialS: Float64Array;
  readonly #doubtUntilS: Float64Array;

  constructor(sensorCount: number, reference: FieldReference) {
    const array = (value: number) => new Float64Array(sensorCount).fill(value);
    this.off = array(Number.NaN);
    this.#reference = reference;
    this.norm = array(0);
    this.horizontal = array(0);
    this.down = array(0);
    this.#lastMagS = array(Number.NEGATIVE_INFINITY);
    this.#lastInertialS = array(Number.NEGATIVE_INFINITY);
    this.#doubtUntilS = array(Number.NEGATIVE_INFINITY);
  }

  /**
   * Takes sensor `i`'s part of a sweep; feeds the reference while that is learned.
   * @param orientations body axes to earth as of the sweep before, scalar first, sensors x 4
   * @param inclinationSigma how uncertain their inclinations are, rad, by sensor
   * @returns true when there was a reading of the field
   */
  read(sweep: Sweep, i: number, orientations: Float64Array, inclinationSigma: Float64Array): boolean {
    const { timeS } = sweep;
    if ((sweep.conditions[i]! & DOUBTFUL) !== 0) this.#doubtUntilS[i] = timeS + DOUBT_S;
    if ((sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL) {
      if (timeS - this.#lastInertialS[i]! > BRIDGED_S) this.#doubtUntilS[i] = timeS + DOUBT_S;
      // The first reading ends no absence.
      if (this.#lastInertialS[i] === Number.NEGATIVE_INFINITY) this.#doubtUntilS[i] = timeS;
      this.#lastInertialS[i] = timeS;
    }
    if ((sweep.present[i]! & HAS_MAG) === 0) return false;

    this.#smooth(i, timeS, sweep.values, orientations);
    this.#reference.reading(i, this.horizontal[i]!, this.down[i]!);
    const byNorm = this.norm[i]! / this.#reference.normUT - 1;
    const byDip = timeS < this.#doubtUntilS[i]! ? 0 : this.#dipOff(i, SIGMAS * inclinationSigma[i]!);
    this.off[i] = Math.hypot(byNorm, byDip);
    return true;
  }

  /** How far the field is turned in the vertical plane beyond what the vertical's uncertainty explains, share of the norm. */
  #dipOff(i: number, uncertain: number): number {
    const { horizontalUT, downUT } = this.#reference;
    const dip = Math.atan2(this.down[i]!, this.horizontal[i]!) - Math.atan2(downUT, horizontalUT);
    return 2 * Math.sin(Math.max(0, Math.abs(dip) - uncertain) / 2);
  }

  #smooth(i: number, timeS: number, values: Float64Array, orientations: Float64Array): void {
    const at = i * CHANNELS + MAG;
    const x = values[at]!;
    const y = values[at + 1]!;
    const z = values[at + 2]!;
    const qw = orientations[i * 4]!;
    const qx = orientations[i * 4 + 1]!;
    const qy = orientations[i * 4 + 2]!;
    const qz = orientations[i * 4 + 3]!;
    // Third row of the rotation: the earth's vertical seen in body axes.
    const up = 2 * (qx * qz - qw * qy) * x + 2 * (qy * qz + qw * qx) * y + (1 - 2 * (qx * qx + qy * qy)) * z;
    const norm = Math.sqrt(x * x + y * y + z * z);
    const horizontal = Math.sqrt(Math.max(0, norm * norm - up * up));
    // The first reading is taken whole: exp(-Infinity) is 0.
    const weight = 1 - Math.exp(-(timeS - this.#lastMagS[i]!) / SMOOTHING_S);
    this.norm[i]! += weight * (norm - this.norm[i]!);
    this.horizontal[i]! += weight * (horizontal - this.horizontal[i]!);
    this.down[i]! += weight * (-up - this.down[i]!);
    this.#lastMagS[i] = timeS;
  }
}
