/**
 * Whether each sensor lies still, and its mean readings while it does. Time is cut into slices; a slice is still when its
 * readings scatter by no more than noise, and a run of still slices lasts as long as their means stay alike.
 *
 * What cannot be seen: turning at a constant rate that a gyroscope's bias might be, about the vertical. Such a turn shows
 * in the field where there is a magnetometer.
 */
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { ACCEL, CHANNELS, GYRO, HAS_INERTIAL, HAS_MAG, MAG, type Sweep } from "../sweep.ts";

const SLICE_S = 0.5;
/** Fewest readings a slice can be judged by. */
const LEAST_READINGS = 4;
/** Scatter of a slice at rest: this many times the model's noise, or what a running pump shakes, °/s and m/s². Ours. */
const NOISE_FACTOR = 3;
const SHAKE_DEG_PER_S = 0.3;
const SHAKE_M_PER_S2 = 0.08;
/** Means of slices of one run differ by no more than this: °/s, m/s² (0.3° of tilt) and µT. Ours. */
const ALIKE_DEG_PER_S = 0.15;
const ALIKE_M_PER_S2 = 0.05;
const ALIKE_UT = 1;
/** A mean rate beyond this many times the largest bias of the data sheet is motion. */
const BIAS_FACTOR = 2;

const PARTS = [GYRO, ACCEL, MAG] as const;

export interface StillSensor {
  readonly model: SensorModel;
  readonly rateHz?: number | undefined;
}

export class StillMeter {
  /** Length of the present run, s; 0 while moving. */
  readonly stillS: Float64Array;
  /** Counts runs: changes when a run ends. */
  readonly runs: Uint32Array;
  /** Mean of the present run, sensors x CHANNELS, as in sweep.ts. Slots of parts that never came are 0. */
  readonly mean: Float64Array;
  /** Readings in the present run. */
  readonly readings: Float64Array;

  /** Largest scatter at rest, parts of each sensor. */
  readonly #scatter: Float64Array;
  readonly #rateLimit: Float64Array;
  readonly #count: Float64Array;
  readonly #magCount: Float64Array;
  readonly #sum: Float64Array;
  readonly #square: Float64Array;
  readonly #runSum: Float64Array;
  readonly #runMagCount: Float64Array;
  /** Mean of the run's first slice. */
  readonly #first: Float64Array;
  /** Reading the sums are about: keeps squares small. */
  readonly #origin: Float64Array;
  #sliceEndS = Number.NaN;

  constructor(sensors: readonly StillSensor[], hubRateHz: number) {
    const n = sensors.length;
    const slots = () => new Float64Array(n * CHANNELS);
    this.stillS = new Float64Array(n);
    this.runs = new Uint32Array(n);
    this.readings = new Float64Array(n);
    this.#count = new Float64Array(n);
    this.#magCount = new Float64Array(n);
    this.#runMagCount = new Float64Array(n);
    [this.mean, this.#sum, this.#square, this.#runSum, this.#first, this.#origin] = [
      slots(),
      slots(),
      slots(),
      slots(),
      slots(),
      slots(),
    ];
    this.#rateLimit = Float64Array.from(
      sensors,
      ({ model }) => BIAS_FACTOR * model.gyro.biasDegPerS * RAD_PER_DEG,
    );
    this.#scatter = Float64Array.from(sensors.flatMap((sensor) => scatterAtRest(sensor, hubRateHz)));
  }

  /** @param readings sensors x CHANNELS, sensor axes: `sweep.raw`, or calibrated ones */
  observe(sweep: Sweep, readings: Float64Array): void {
    if (!(sweep.timeS < this.#sliceEndS)) this.#endSlice(sweep.timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      const here = sweep.present[i]!;
      if ((here & HAS_INERTIAL) !== HAS_INERTIAL) continue;
      const at = i * CHANNELS;
      this.#count[i]!++;
      this.#add(at, readings, 0, MAG);
      if ((here & HAS_MAG) === 0) continue;
      this.#magCount[i]!++;
      this.#add(at, readings, MAG, CHANNELS);
    }
  }

  #add(at: number, readings: Float64Array, from: number, to: number): void {
    for (let c = at + from; c < at + to; c++) {
      const off = readings[c]! - this.#origin[c]!;
      this.#sum[c]! += off;
      this.#square[c]! += off * off;
    }
  }

  #endSlice(timeS: number): void {
    // After a gap longer than a slice nothing is known of the time between.
    const whole = timeS - this.#sliceEndS < SLICE_S;
    for (let i = 0; i < this.stillS.length; i++) {
      const count = this.#count[i]!;
      if (whole && count >= LEAST_READINGS && this.#isStill(i)) this.#extend(i);
      else this.#restart(i);
      this.#count[i] = 0;
      this.#magCount[i] = 0;
    }
    this.#sum.fill(0);
    this.#square.fill(0);
    this.#sliceEndS = timeS + SLICE_S;
  }

  #isStill(i: number): boolean {
    for (let part = 0; part < 3; part++) {
      const n = part === 2 ? this.#magCount[i]! : this.#count[i]!;
      if (n < LEAST_READINGS) continue;
      for (let c = i * CHANNELS + PARTS[part]!, end = c + 3; c < end; c++) {
        const mean = this.#sum[c]! / n;
        if (this.#square[c]! / n - mean * mean > this.#scatter[3 * i + part]! ** 2) return false;
        const whole = mean + this.#origin[c]!;
        if (part === 0 && Math.abs(whole) > this.#rateLimit[i]!) return false;
        if (this.stillS[i] !== 0 && Math.abs(whole - this.#first[c]!) > ALIKE[part]!) return false;
      }
    }
    return true;
  }

  #extend(i: number): void {
    const n = this.#count[i]!;
    const nMag = this.#magCount[i]!;
    const starts = this.stillS[i] === 0;
    this.stillS[i]! += SLICE_S;
    this.readings[i]! += n;
    this.#runMagCount[i]! += nMag;
    for (let k = 0; k < CHANNELS; k++) {
      const c = i * CHANNELS + k;
      const m = k < MAG ? n : nMag;
      const inRun = k < MAG ? this.readings[i]! : this.#runMagCount[i]!;
      if (inRun === 0) continue;
      this.#runSum[c]! += this.#sum[c]! + m * this.#origin[c]!;
      this.mean[c] = this.#runSum[c]! / inRun;
      if (starts) this.#first[c] = this.mean[c]!;
    }
  }

  #restart(i: number): void {
    if (this.stillS[i] !== 0) this.runs[i]!++;
    this.stillS[i] = 0;
    this.readings[i] = 0;
    this.#runMagCount[i] = 0;
    const n = this.#count[i]!;
    for (let k = 0; k < CHANNELS; k++) {
      const c = i * CHANNELS + k;
      const m = k < MAG ? n : this.#magCount[i]!;
      if (m > 0) this.#origin[c]! += this.#sum[c]! / m;
      this.#runSum[c] = 0;
    }
  }
}

const ALIKE = [ALIKE_DEG_PER_S * RAD_PER_DEG, ALIKE_M_PER_S2, ALIKE_UT] as const;

function scatterAtRest({ model, rateHz }: StillSensor, hubRateHz: number): number[] {
  const { gyro, accel, mag } = noiseOf(model, rateHz ?? hubRateHz);
  return [
    Math.max(NOISE_FACTOR * gyro, SHAKE_DEG_PER_S * RAD_PER_DEG),
    Math.max(NOISE_FACTOR * accel, SHAKE_M_PER_S2),
    Math.max(NOISE_FACTOR * mag, ALIKE_UT),
  ];
}

/** Standard deviation of one reading at `rateHz`: rad/s, m/s², µT. */
export function noiseOf(model: SensorModel, rateHz: number): { gyro: number; accel: number; mag: number } {
  const root = Math.sqrt(rateHz / 2);
  return {
    gyro: model.gyro.noiseDegPerSPerSqrtHz * RAD_PER_DEG * root,
    accel: model.accel.noiseMicroGPerSqrtHz * 1e-6 * STANDARD_GRAVITY * root,
    mag: model.mag?.noiseUT ?? 0,
  };
}
