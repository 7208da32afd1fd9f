/**
 * Rest: each sensor's noise, bias, gravity and field while it lies still (calibration/still.ts), as calibrated.
 *
 * Noise is the Allan deviation of single readings, from the differences of successive ones, so that slow changes do not
 * count; a slice's differences count once the slice has proved still.
 */
import { noiseOf, StillMeter } from "../calibration/still.ts";
import { DEG_PER_RAD, STANDARD_GRAVITY } from "../numeric/units.ts";
import { ACCEL, CHANNELS, GYRO, HAS_INERTIAL, MAG, type Sweep } from "../sweep.ts";
import type { CheckReason } from "../wire/check.ts";
import {
  type CheckSetup,
  type Finding,
  figure,
  inUse,
  type JudgedFigure,
  lowest,
  type Step,
} from "./step.ts";

/** Gyroscope and accelerometer, three axes each. */
const AXES = 6;
const MILLI_G = STANDARD_GRAVITY / 1000;
/** Fewest differences that tell noise. */
const LEAST_DIFFERENCES = 50;

export class RestStep implements Step {
  readonly toDo = "Lay the body straight and let go: nothing may move.";
  readonly #setup: CheckSetup;
  readonly #still: StillMeter;
  /** Longest stillness so far, and the means over it, sensors x CHANNELS. */
  readonly #longestS: Float64Array;
  readonly #mean: Float64Array;
  /** The last reading, sensors x AXES; NaN after a gap. */
  readonly #last: Float64Array;
  /** Sums of squared differences: of the slice at hand, and of those that were still. */
  readonly #slice: Float64Array;
  readonly #sliceCount: Float64Array;
  readonly #square: Float64Array;
  readonly #count: Float64Array;
  readonly #stillBefore: Float64Array;

  constructor(setup: CheckSetup) {
    const { sensors, models, rateHz } = setup;
    const n = sensors.length;
    this.#setup = setup;
    this.#still = new StillMeter(
      sensors.map((sensor, i) => ({ model: models[i]!, rateHz: sensor.rateHz })),
      rateHz,
    );
    this.#longestS = new Float64Array(n);
    this.#mean = new Float64Array(n * CHANNELS).fill(Number.NaN);
    this.#last = new Float64Array(n * AXES).fill(Number.NaN);
    this.#slice = new Float64Array(n * AXES);
    this.#sliceCount = new Float64Array(n);
    this.#square = new Float64Array(n * AXES);
    this.#count = new Float64Array(n);
    this.#stillBefore = new Float64Array(n);
  }

  observe(sweep: Sweep): void {
    this.#still.observe(sweep, sweep.values);
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (this.#still.stillS[i] !== this.#stillBefore[i] || this.#still.stillS[i] === 0) this.#endSlice(i);
      this.#difference(sweep, i);
    }
  }

  /** The meter has judged the slice: it is kept where the stillness grew. */
  #endSlice(i: number): void {
    const stillS = this.#still.stillS[i]!;
    // The first still slice only tells where slices begin: what was summed up before it may have moved.
    if (stillS > this.#stillBefore[i]! && this.#stillBefore[i]! > 0) {
      for (let k = i * AXES; k < (i + 1) * AXES; k++) this.#square[k]! += this.#slice[k]!;
      this.#count[i]! += this.#sliceCount[i]!;
    }
    this.#slice.fill(0, i * AXES, (i + 1) * AXES);
    this.#sliceCount[i] = 0;
    this.#stillBefore[i] = stillS;
    if (stillS <= this.#longestS[i]!) return;
    this.#longestS[i] = stillS;
    for (let k = i * CHANNELS; k < (i + 1) * CHANNELS; k++) this.#mean[k] = this.#still.mean[k]!;
  }

  #difference({ values, present, lostBefore }: Sweep, i: number): void {
    const whole = (present[i]! & HAS_INERTIAL) === HAS_INERTIAL;
    const follows = whole && lostBefore === 0 && !Number.isNaN(this.#last[i * AXES]!);
    for (let k = 0; k < AXES; k++) {
      const at = i * AXES + k;
      const value = whole ? values[i * CHANNELS + k]! : Number.NaN;
      if (follows) this.#slice[at]! += (value - this.#last[at]!) ** 2;
      this.#last[at] = value;
    }
    if (follows) this.#sliceCount[i]!++;
  }

  finding(isOut: readonly boolean[]): Finding {
    const { limits, sensors } = this.#setup;
    const used = inUse(isOut);
    const missing: CheckReason[] = used
      .filter((i) => this.#longestS[i]! < limits.stillS)
      .map((sensor) => ({
        sensor,
        text: `still for ${this.#longestS[sensor]!.toFixed(1)} s at most, ${limits.stillS} s are needed`,
      }));
    return {
      share: Math.min(1, lowest(used.map((i) => this.#longestS[i]!)) / limits.stillS),
      missing,
      figures: used.flatMap((i) => this.#figures(i)),
      faults: [],
      notes:
        sensors.some((_, i) => this.#setup.models[i]!.mag) && this.#setup.fieldUT === null
          ? ["The rig file names no site: the field is not compared with the Earth's."]
          : [],
    };
  }

  #figures(sensor: number): JudgedFigure[] {
    const { limits, models, sensors, rateHz, gravity, fieldUT } = this.#setup;
    const { gyro, accel, mag } = models[sensor]!;
    const rate = Math.min(sensors[sensor]!.rateHz ?? rateHz, rateHz);
    const noise = noiseOf(models[sensor]!, rate);
    const root = Math.sqrt(rate / 2);
    // Rounding to whole counts adds a twelfth of a count's square.
    const allowed = (sigma: number, range: number, bits: number) =>
      (limits.restNoiseFactor * Math.hypot(sigma, (2 * range) / 2 ** bits / Math.sqrt(12))) / root;
    const offset = Math.sqrt(3);
    const known = this.#longestS[sensor]! > 0;
    const norm = (part: number) => (known ? this.#normOf(sensor, part) : Number.NaN);
    const figures = [
      figure((this.#noise(sensor, GYRO) / root) * DEG_PER_RAD, {
        name: "gyroscope noise",
        sensor,
        unit: "°/s/√Hz",
        digits: 4,
        most: allowed(noise.gyro * DEG_PER_RAD, gyro.rangeDegPerS, gyro.bits),
        advice: "look for something that shakes it; if there is nothing, replace the sensor",
      }),
      figure((this.#noise(sensor, ACCEL) / root / MILLI_G) * 1000, {
        name: "accelerometer noise",
        sensor,
        unit: "µg/√Hz",
        digits: 0,
        most: allowed((noise.accel / MILLI_G) * 1000, accel.rangeG * 1e6, accel.bits),
        advice: "look for something that shakes it; if there is nothing, replace the sensor",
      }),
      figure(norm(GYRO) * DEG_PER_RAD, {
        name: "rate at rest",
        sensor,
        unit: "°/s",
        digits: 3,
        most: limits.restGyroBiasShare * offset * gyro.biasDegPerS,
        advice: "calibrate it again at rest",
      }),
      figure((norm(ACCEL) - gravity) / MILLI_G, {
        name: "gravity off by",
        sensor,
        unit: "mg",
        digits: 1,
        least: -limits.restGravityShare * offset * accel.biasMilliG,
        most: limits.restGravityShare * offset * accel.biasMilliG,
        advice: "calibrate its accelerometer again in six positions",
      }),
    ];
    if (mag === undefined || fieldUT === null) return figures;
    const most = 100 * limits.fieldOffShare;
    const field = figure(100 * (norm(MAG) / fieldUT - 1), {
      name: "field off by",
      sensor,
      unit: "%",
      digits: 1,
      least: -most,
      most,
      advice: "look for magnets and steel nearby, else calibrate its magnetometer again",
    });
    return [...figures, field];
  }

  /** Standard deviation of one reading of the noisiest axis, SI; NaN while too little was seen. */
  #noise(sensor: number, part: number): number {
    const count = this.#count[sensor]!;
    if (count < LEAST_DIFFERENCES) return Number.NaN;
    const from = sensor * AXES + part;
    return Math.sqrt(Math.max(...this.#square.subarray(from, from + 3)) / count / 2);
  }

  #normOf(sensor: number, part: number): number {
    const at = sensor * CHANNELS + part;
    return Math.hypot(this.#mean[at]!, this.#mean[at + 1]!, this.#mean[at + 2]!);
  }
}
