/**
 * What each sensor measures while it lies still (still-slices.ts): noise and means, over windows that are judged one by
 * one, and over the whole run of still slices.
 */
import { AllanMeter, FLAT_SHARE } from "../numeric/allan.ts";
import { ACCEL, CHANNELS, GYRO, MAG, type Sweep } from "../sweep.ts";
import type { HealthSetup } from "./setup.ts";
import { INERTIAL_AXES, SLICE_S, StillSlices } from "./still-slices.ts";

/** Noise is read from averages over this time: it holds for units that filter their readings, too, s. */
const BLOCK_S = 0.05;
/** Blocks averaged for the Allan deviation of a run: up to 12.8 s. */
const FACTORS = [1, 2, 4, 8, 16, 32, 64, 128, 256] as const;
/** A run must be so many times longer than an averaging time to tell its deviation, and so long in all, s. */
const RUN_FACTOR = 6;
const LEAST_RUN_S = 30;

/** Figures at rest by sensor, over one stretch; NaN where there is none. */
export class RestFigures {
  /** Length of the stretch, s. */
  readonly stillS: Float64Array;
  /** Mean rate, body axes, less the calibration's bias, sensors x 3, rad/s. */
  readonly gyroBias: Float64Array;
  /** Norm of the mean specific force, m/s². */
  readonly gravity: Float64Array;
  /** Norm of the mean field, µT. */
  readonly fieldUT: Float64Array;
  /** White-noise density of the noisiest axis, one-sided: rad/s/√Hz and m/s²/√Hz. */
  readonly gyroNoise: Float64Array;
  readonly accelNoise: Float64Array;

  constructor(sensorCount: number) {
    const array = (width: number) => new Float64Array(sensorCount * width).fill(Number.NaN);
    this.stillS = array(1).fill(0);
    this.gyroBias = array(3);
    this.gravity = array(1);
    this.fieldUT = array(1);
    this.gyroNoise = array(1);
    this.accelNoise = array(1);
  }
}

/** Sums over a stretch, and the noise of its blocks. */
class Stretch {
  readonly figures: RestFigures;
  readonly allan: AllanMeter;
  readonly #sum: Float64Array;
  readonly #count: Float64Array;
  readonly #fieldCount: Float64Array;
  readonly #slices: Uint32Array;

  constructor(sensorCount: number, factors: readonly number[]) {
    this.figures = new RestFigures(sensorCount);
    this.allan = new AllanMeter(sensorCount * INERTIAL_AXES, factors);
    this.#sum = new Float64Array(sensorCount * CHANNELS);
    this.#count = new Float64Array(sensorCount);
    this.#fieldCount = new Float64Array(sensorCount);
    this.#slices = new Uint32Array(sensorCount);
  }

  /** Takes in the slice that has just ended. */
  add(i: number, { mean, readings, fieldReadings }: StillSlices): void {
    this.#slices[i]!++;
    this.#count[i]! += readings[i]!;
    this.#fieldCount[i]! += fieldReadings[i]!;
    for (let k = 0; k < CHANNELS; k++) {
      const n = k < MAG ? readings[i]! : fieldReadings[i]!;
      if (n > 0) this.#sum[i * CHANNELS + k]! += n * mean[i * CHANNELS + k]!;
    }
  }

  slices(i: number): number {
    return this.#slices[i]!;
  }

  /** @param blockS how long the averages are that the Allan deviation was taken of */
  write(i: number, blockS: number): void {
    const { figures } = this;
    figures.stillS[i] = this.#slices[i]! * SLICE_S;
    for (let k = 0; k < 3; k++) {
      figures.gyroBias[3 * i + k] = this.#sum[i * CHANNELS + GYRO + k]! / this.#count[i]!;
    }
    figures.gravity[i] = this.#norm(i, ACCEL) / this.#count[i]!;
    figures.fieldUT[i] = this.#norm(i, MAG) / this.#fieldCount[i]!;
    const root = Math.sqrt(2 * blockS);
    figures.gyroNoise[i] = root * this.deviation(i, GYRO, 0);
    figures.accelNoise[i] = root * this.deviation(i, ACCEL, 0);
  }

  /** Allan deviation of the noisiest axis of a part. */
  deviation(i: number, part: number, f: number): number {
    const row = i * INERTIAL_AXES + part;
    const { allan } = this;
    return Math.max(allan.deviation(row, f), allan.deviation(row + 1, f), allan.deviation(row + 2, f));
  }

  reset(i: number): void {
    this.#sum.fill(0, i * CHANNELS, (i + 1) * CHANNELS);
    this.#count[i] = 0;
    this.#fieldCount[i] = 0;
    this.#slices[i] = 0;
    for (let row = i * INERTIAL_AXES; row < (i + 1) * INERTIAL_AXES; row++) this.allan.reset(row);
  }

  #norm(i: number, part: number): number {
    const at = i * CHANNELS + part;
    return Math.hypot(this.#sum[at]!, this.#sum[at + 1]!, this.#sum[at + 2]!);
  }
}

export class RestMeter {
  /** Sensors whose window has ended with this sweep. */
  readonly windowEnded: Uint8Array;
  /** Bias instability of the noisiest gyro axis over the run, rad/s: no more than this; NaN before half a minute. */
  readonly gyroInstability: Float64Array;
  readonly #windowSlices: number;
  readonly #slices: StillSlices;
  readonly #window: Stretch;
  readonly #run: Stretch;
  /** Readings in a block, and how long it is. */
  readonly #blockReadings: Float64Array;
  readonly #blockS: Float64Array;
  readonly #blockSum: Float64Array;
  readonly #inBlock: Uint32Array;
  /** Blocks of the slice wait until it has proved still: sensors x axes x #mostBlocks. */
  readonly #blocks: Float64Array;
  readonly #blockCount: Uint32Array;
  readonly #mostBlocks: number;

  constructor(setup: HealthSetup, windowS: number) {
    const n = setup.sensors.length;
    const rates = setup.sensors.map((sensor) => Math.min(sensor.rateHz ?? setup.rateHz, setup.rateHz));
    this.windowEnded = new Uint8Array(n);
    this.gyroInstability = new Float64Array(n).fill(Number.NaN);
    this.#windowSlices = Math.max(1, Math.round(windowS / SLICE_S));
    this.#slices = new StillSlices(setup);
    this.#window = new Stretch(n, FACTORS.slice(0, 1));
    this.#run = new Stretch(n, FACTORS);
    this.#blockReadings = Float64Array.from(rates, (rate) => Math.max(1, Math.round(BLOCK_S * rate)));
    this.#blockS = Float64Array.from(rates, (rate, i) => this.#blockReadings[i]! / rate);
    this.#blockSum = new Float64Array(n * INERTIAL_AXES);
    this.#inBlock = new Uint32Array(n);
    // A slice may be as long as two of its length, across a gap.
    this.#mostBlocks = Math.ceil((2 * SLICE_S) / Math.min(...this.#blockS));
    this.#blocks = new Float64Array(n * INERTIAL_AXES * this.#mostBlocks);
    this.#blockCount = new Uint32Array(n);
  }

  /** The last complete window of each sensor's still time. */
  get window(): RestFigures {
    return this.#window.figures;
  }

  /** The present run of still time, or the last one that had a complete window. */
  get run(): RestFigures {
    return this.#run.figures;
  }

  /** Needs this sweep's broken readings marked. */
  observe(sweep: Sweep): void {
    this.windowEnded.fill(0);
    if (this.#slices.advance(sweep.timeS)) this.#endSlices();
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (this.#slices.add(sweep, i)) this.#addToBlock(i, sweep.values);
    }
  }

  #addToBlock(i: number, values: Float64Array): void {
    const row = i * INERTIAL_AXES;
    for (let k = 0; k < INERTIAL_AXES; k++) this.#blockSum[row + k]! += values[i * CHANNELS + k]!;
    this.#inBlock[i]!++;
    if (this.#inBlock[i]! < this.#blockReadings[i]!) return;
    const b = this.#blockCount[i]!;
    for (let k = 0; k < INERTIAL_AXES; k++) {
      const mean = this.#blockSum[row + k]! / this.#inBlock[i]!;
      if (b < this.#mostBlocks) this.#blocks[(row + k) * this.#mostBlocks + b] = mean;
      this.#blockSum[row + k] = 0;
    }
    this.#inBlock[i] = 0;
    this.#blockCount[i] = Math.min(this.#mostBlocks, b + 1);
  }

  #endSlices(): void {
    for (let i = 0; i < this.windowEnded.length; i++) {
      if (this.#slices.still[i] === 1) this.#extend(i);
      else if (this.#run.slices(i) > 0) {
        this.#window.reset(i);
        this.#run.reset(i);
      }
      this.#blockCount[i] = 0;
    }
  }

  #extend(i: number): void {
    for (let row = i * INERTIAL_AXES; row < (i + 1) * INERTIAL_AXES; row++) {
      for (let b = 0; b < this.#blockCount[i]!; b++) {
        const mean = this.#blocks[row * this.#mostBlocks + b]!;
        this.#window.allan.add(row, mean);
        this.#run.allan.add(row, mean);
      }
    }
    this.#window.add(i, this.#slices);
    this.#run.add(i, this.#slices);
    if (this.#window.slices(i) < this.#windowSlices) return;
    this.windowEnded[i] = 1;
    this.#window.write(i, this.#blockS[i]!);
    this.#run.write(i, this.#blockS[i]!);
    this.gyroInstability[i] = this.#instability(i);
    this.#window.reset(i);
    this.#slices.follow(i);
  }

  /** From the least Allan deviation that the run is long enough to tell. */
  #instability(i: number): number {
    const runS = this.#run.figures.stillS[i]!;
    let least = Number.NaN;
    if (runS < LEAST_RUN_S) return least;
    for (let f = 0; f < FACTORS.length && FACTORS[f]! * this.#blockS[i]! * RUN_FACTOR <= runS; f++) {
      const here = this.#run.deviation(i, GYRO, f) / FLAT_SHARE;
      if (!(here >= least)) least = here;
    }
    return least;
  }
}
