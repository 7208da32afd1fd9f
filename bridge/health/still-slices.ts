/**
 * Whether each sensor lies still, slice of half a second by slice. It does when
 *
 * - rate, force and field have the means of a slice before: nothing turns, tilts or drifts;
 * - they scatter by no more than noise and a running pump would make, or they scatter like noise, each reading as far from
 *   the one before as from any other: von Neumann's ratio (Ann. Math. Stat. 12 (1941) 367) is 2 for white noise, and
 *   small for whatever moves as bodies move. So a sensor that has become noisy is still known to lie still.
 *
 * What cannot be seen: turning at an even rate about the vertical, without a magnetometer that would show it.
 */
import { RAD_PER_DEG } from "../numeric/units.ts";
import { ACCEL, CHANNELS, CONDITION, HAS_INERTIAL, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import { limitsOf } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";

export const SLICE_S = 0.5;
/** Gyro and accelerometer. */
export const INERTIAL_AXES = 6;
/** Fewest readings a slice can be judged by. */
const LEAST_READINGS = 4;
/** Readings that scatter no more than this are calm: so many times the model's noise, or what a pump shakes. Ours. */
const NOISE_FACTOR = 3;
const SHAKE = [0.3 * RAD_PER_DEG, 0.08] as const;
/** Beyond so many times what is calm no noise reaches: knocks. Ours. */
const LOUD_FACTOR = 7;
/** Means no further apart than this are alike: rad/s, m/s² (0.3° of tilt), µT. Ours. */
const ALIKE = [0.15 * RAD_PER_DEG, 0.05, 1] as const;
/** And so many times what their scatter leaves of them, which two means of noise hardly ever differ by. */
const ALIKE_DEVIATIONS = 6;
/** White noise has a ratio of 2, with a deviation of 0.28 over the readings of a slice at 100 Hz: 1 is far from both. */
const LEAST_RATIO = 1;
const BROKEN = CONDITION.STUCK | CONDITION.READ_FAILED | CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED;

export class StillSlices {
  /** Of the slice that has just ended: whether each sensor lay still, its readings and those with field, its means. */
  readonly still: Uint8Array;
  readonly readings: Float64Array;
  readonly fieldReadings: Float64Array;
  /** sensors x CHANNELS; NaN of a part that did not come. */
  readonly mean: Float64Array;

  /** Largest calm scatter, gyro and accelerometer of each sensor. */
  readonly #calm: Float64Array;
  #endS = Number.NaN;
  readonly #count: Float64Array;
  readonly #fieldCount: Float64Array;
  readonly #broken: Uint8Array;
  /** Sums, squares and squared steps about the slice's first reading. */
  readonly #origin: Float64Array;
  readonly #sum: Float64Array;
  readonly #square: Float64Array;
  readonly #step: Float64Array;
  readonly #last: Float64Array;
  /** Means that those of the next slices have to be like; NaN for any. */
  readonly #like: Float64Array;

  constructor({ sensors, rateHz }: HealthSetup) {
    const n = sensors.length;
    const slots = () => new Float64Array(n * CHANNELS);
    this.still = new Uint8Array(n);
    this.readings = new Float64Array(n);
    this.fieldReadings = new Float64Array(n);
    this.mean = slots();
    this.#calm = Float64Array.from(
      sensors.flatMap((sensor) =>
        SHAKE.map((shake, p) => Math.max(NOISE_FACTOR * limitsOf(sensor, rateHz)[p]!.noise, shake)),
      ),
    );
    this.#count = new Float64Array(n);
    this.#fieldCount = new Float64Array(n);
    this.#broken = new Uint8Array(n);
    this.#origin = slots();
    this.#sum = slots();
    this.#square = slots();
    this.#step = slots();
    this.#last = slots();
    this.#like = slots().fill(Number.NaN);
  }

  /**
   * Time passes, before the readings of the sweep at `timeS` are added.
   * @returns true when a slice has ended
   */
  advance(timeS: number): boolean {
    if (timeS < this.#endS) return false;
    // After a gap longer than a slice nothing is known of the time between.
    const whole = timeS - this.#endS < SLICE_S;
    for (let i = 0; i < this.still.length; i++) this.#judge(i, whole);
    for (const sums of [this.#count, this.#fieldCount, this.#broken, this.#sum, this.#square, this.#step]) {
      sums.fill(0);
    }
    this.#endS = timeS + SLICE_S;
    return true;
  }

  /** Sensor `i`'s part of a sweep. Needs broken readings marked. @returns true when there was rate and force */
  add({ values, present, conditions }: Sweep, i: number): boolean {
    if ((conditions[i]! & BROKEN) !== 0) this.#broken[i] = 1;
    if ((present[i]! & HAS_INERTIAL) !== HAS_INERTIAL) return false;
    const start = i * CHANNELS;
    if (this.#count[i] === 0) {
      for (let c = start; c < start + INERTIAL_AXES; c++) this.#origin[c] = this.#last[c] = values[c]!;
    }
    this.#count[i]!++;
    for (let c = start; c < start + INERTIAL_AXES; c++) {
      const value = values[c]!;
      const off = value - this.#origin[c]!;
      const step = value - this.#last[c]!;
      this.#last[c] = value;
      this.#sum[c]! += off;
      this.#square[c]! += off * off;
      this.#step[c]! += step * step;
    }
    if ((present[i]! & HAS_MAG) === 0) return true;
    this.#fieldCount[i]!++;
    for (let c = start + MAG; c < start + CHANNELS; c++) this.#sum[c]! += values[c]!;
    return true;
  }

  /** From now on sensor `i`'s means are to be like those of the slice that has just ended: slow drifts are followed. */
  follow(i: number): void {
    for (let c = i * CHANNELS; c < (i + 1) * CHANNELS; c++) this.#like[c] = this.mean[c]!;
  }

  #judge(i: number, whole: boolean): void {
    this.readings[i] = this.#count[i]!;
    this.fieldReadings[i] = this.#fieldCount[i]!;
    for (let k = 0; k < CHANNELS; k++) {
      const c = i * CHANNELS + k;
      this.mean[c] =
        k < MAG ? this.#origin[c]! + this.#sum[c]! / this.#count[i]! : this.#sum[c]! / this.#fieldCount[i]!;
    }
    const judged = whole && this.#count[i]! >= LEAST_READINGS && this.#broken[i] === 0;
    this.still[i] = judged && this.#isAlike(i) && this.#isCalm(i) ? 1 : 0;
    if (this.still[i] === 0) this.#like.fill(Number.NaN, i * CHANNELS, (i + 1) * CHANNELS);
    else if (Number.isNaN(this.#like[i * CHANNELS]!)) this.follow(i);
  }

  /** Squares about the slice's mean; rounding must not make them negative. */
  #squares(i: number, c: number): number {
    return Math.max(0, this.#square[c]! - (this.#sum[c]! * this.#sum[c]!) / this.#count[i]!);
  }

  #isAlike(i: number): boolean {
    for (let k = 0; k < CHANNELS; k++) {
      const c = i * CHANNELS + k;
      const left = k < MAG ? Math.sqrt(this.#squares(i, c)) / this.#count[i]! : 0;
      // NaN, where there is nothing to be like or no field, is not above anything.
      const off = Math.abs(this.mean[c]! - this.#like[c]!);
      if (off > ALIKE[Math.floor(k / 3)]! + ALIKE_DEVIATIONS * left) return false;
    }
    return true;
  }

  #isCalm(i: number): boolean {
    const n = this.#count[i]!;
    for (let k = 0; k < INERTIAL_AXES; k++) {
      const c = i * CHANNELS + k;
      const squares = this.#squares(i, c);
      const calm = n * this.#calm[2 * i + (k < ACCEL ? 0 : 1)]! ** 2;
      if (squares <= calm) continue;
      if (squares > calm * LOUD_FACTOR * LOUD_FACTOR) return false;
      if ((this.#step[c]! / (n - 1)) * n < LEAST_RATIO * squares) return false;
    }
    return true;
  }
}
