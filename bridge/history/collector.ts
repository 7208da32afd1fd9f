/**
 * Gathers what a trial tells of each sensor while its bytes run through the pipeline. The gyroscope's bias is the sensor's
 * own: what its calibration takes off is put back, so that a new calibration between two trials hides nothing.
 */
import { DEG_PER_RAD, STANDARD_GRAVITY } from "../numeric/units.ts";
import { HAS_ACCEL, HAS_GYRO, HAS_INERTIAL, HAS_ORIENTATION, type Sweep } from "../sweep.ts";
import type { Flag } from "../wire/flag.ts";
import type { FigureKey, Rest, SensorHealth } from "./figures.ts";

/** What the health room shows of itself, by sensor. */
export interface WatchedHealth {
  readonly gyroHeadroom: Float64Array;
  readonly accelHeadroom: Float64Array;
  readonly rest: {
    readonly windowEnded: Uint8Array;
    readonly gyroInstability: Float64Array;
    readonly run: {
      readonly stillS: Float64Array;
      readonly gyroBias: Float64Array;
      readonly gravity: Float64Array;
      readonly fieldUT: Float64Array;
      readonly gyroNoise: Float64Array;
      readonly accelNoise: Float64Array;
    };
  };
}

export interface CollectedSensor {
  readonly name: string;
  readonly serial: string;
  readonly model: string;
  /** Sweeps from one reading due to the next. */
  readonly period: number;
  /** What the calibration takes off the rate, body axes, rad/s. */
  readonly knownBias: readonly number[];
  readonly limits: Readonly<Record<FigureKey, number | null>>;
}

export interface Expected {
  readonly gravityMPerS2: number;
  /** null where the rig names no site. */
  readonly fieldUT: number | null;
}

/** A rest period, and its bias by axes, °/s. */
interface Found extends Rest {
  readonly bias: readonly number[];
  readonly wander: number | null;
}

/** Fewest sensors whose median tells what the field here is, as the detector has it. */
const LEAST_FIELDS = 3;
const MICRO_G = 1e-6 * STANDARD_GRAVITY;

export class HealthCollector {
  readonly #sensors: readonly CollectedSensor[];
  readonly #health: WatchedHealth;
  readonly #rests: Found[][];
  readonly #seen: Uint8Array;
  readonly #came: Float64Array;
  readonly #gyroLeast: Float64Array;
  readonly #accelLeast: Float64Array;
  /** By sensor; the rig last. */
  readonly #flags: Record<string, number>[];
  #due = 0;

  constructor(sensors: readonly CollectedSensor[], health: WatchedHealth) {
    const n = sensors.length;
    this.#sensors = sensors;
    this.#health = health;
    this.#rests = sensors.map(() => []);
    this.#seen = new Uint8Array(n);
    this.#came = new Float64Array(n);
    this.#gyroLeast = new Float64Array(n).fill(1);
    this.#accelLeast = new Float64Array(n).fill(1);
    this.#flags = Array.from({ length: n + 1 }, () => ({}));
  }

  /** A sweep went through the pipeline. */
  sweep({ present, timeS, lostBefore }: Sweep): void {
    const { gyroHeadroom, accelHeadroom, rest } = this.#health;
    this.#due += 1 + lostBefore;
    for (let i = 0; i < this.#came.length; i++) {
      const here = present[i]!;
      this.#seen[i]! |= here;
      if ((here & HAS_INERTIAL) === HAS_INERTIAL || (here & HAS_ORIENTATION) !== 0) this.#came[i]!++;
      this.#gyroLeast[i] = Math.min(this.#gyroLeast[i]!, gyroHeadroom[i]!);
      this.#accelLeast[i] = Math.min(this.#accelLeast[i]!, accelHeadroom[i]!);
      if (rest.windowEnded[i] === 1) this.#rested(i, timeS);
    }
  }

  /** A flag was raised. */
  flag({ kind, sensor }: Flag): void {
    const counts = this.#flags.at(sensor)!;
    counts[kind] = (counts[kind] ?? 0) + 1;
  }

  /** Flags of the whole rig, by kind. */
  get rigFlags(): Record<string, number> {
    return this.#flags.at(-1)!;
  }

  /** All that was gathered, nose to tail. */
  sensors(expected: Expected): SensorHealth[] {
    const fields = this.#rests.map((rests) => mean(rests, (rest) => rest.fieldUT));
    const common = commonField(fields);
    return this.#sensors.map((sensor, i) => {
      const { name, serial, model, limits } = sensor;
      const seen = (part: number, free: number) =>
        (this.#seen[i]! & part) === 0 ? null : rounded(100 * free);
      const delivered =
        this.#due === 0 ? null : 100 * Math.min(1, (this.#came[i]! * sensor.period) / this.#due);
      return {
        name,
        serial,
        model,
        restS: this.#rests[i]!.reduce((sum, { stillS }) => sum + stillS, 0),
        figures: {
          ...restFigures(this.#rests[i]!, expected.gravityMPerS2),
          fieldOffPercent: fieldOff(fields[i]!, expected.fieldUT, common),
          lostPercent: delivered === null ? null : rounded(100 - delivered),
        },
        limits,
        gyroHeadroomPercent: seen(HAS_GYRO, this.#gyroLeast[i]!),
        accelHeadroomPercent: seen(HAS_ACCEL, this.#accelLeast[i]!),
        deliveredPercent: rounded(delivered),
        flags: this.#flags[i]!,
        rests: this.#rests[i]!.map(({ bias, wander, ...rest }) => rest),
      };
    });
  }

  /** A window of rest has ended: of the period that went on, or of a new one. */
  #rested(i: number, timeS: number): void {
    const { run, gyroInstability } = this.#health.rest;
    const rests = this.#rests[i]!;
    const stillS = run.stillS[i]!;
    // A run that goes on has grown; a new one begins with a single window again.
    if (rests.length > 0 && stillS > rests.at(-1)!.stillS) rests.pop();
    const bias = this.#sensors[i]!.knownBias.map(
      (known, k) => (run.gyroBias[3 * i + k]! + known) * DEG_PER_RAD,
    );
    rests.push({
      startS: rounded(timeS - stillS)!,
      stillS,
      bias,
      wander: rounded(gyroInstability[i]! * DEG_PER_RAD * 3600),
      gyroBiasDegPerS: rounded(Math.hypot(...bias)),
      gyroNoiseDegPerSPerSqrtHz: rounded(run.gyroNoise[i]! * DEG_PER_RAD),
      accelNoiseMicroGPerSqrtHz: rounded(run.accelNoise[i]! / MICRO_G),
      gravityMPerS2: rounded(run.gravity[i]!),
      fieldUT: rounded(run.fieldUT[i]!),
    });
  }
}

/** Of all rests together, each by its length. */
function restFigures(rests: readonly Found[], gravityMPerS2: number) {
  const bias = [0, 1, 2].map((k) => mean(rests, (rest) => rest.bias[k]!));
  const gravity = mean(rests, (rest) => rest.gravityMPerS2);
  return {
    gyroBiasDegPerS: bias[0] === null ? null : rounded(Math.hypot(...(bias as number[]))),
    gyroWanderDegPerH: mean(rests, (rest) => rest.wander),
    gyroNoiseDegPerSPerSqrtHz: mean(rests, (rest) => rest.gyroNoiseDegPerSPerSqrtHz),
    accelNoiseMicroGPerSqrtHz: mean(rests, (rest) => rest.accelNoiseMicroGPerSqrtHz),
    gravityOffMilliG: gravity === null ? null : rounded((gravity - gravityMPerS2) / (1000 * MICRO_G)),
  };
}

function mean(rests: readonly Found[], of: (rest: Found) => number | null): number | null {
  let sum = 0;
  let weight = 0;
  for (const rest of rests) {
    const value = of(rest);
    if (value === null) continue;
    sum += rest.stillS * value;
    weight += rest.stillS;
  }
  return weight === 0 ? null : rounded(sum / weight);
}

function commonField(fields: readonly (number | null)[]): number | null {
  const there = fields.filter((field) => field !== null).sort((a, b) => a - b);
  return there.length < LEAST_FIELDS ? null : there[there.length >> 1]!;
}

/** Off both the Earth's field at the site and what most of the others measure: the smaller of the two, %. */
function fieldOff(field: number | null, site: number | null, common: number | null): number | null {
  if (field === null) return null;
  const offs = [site, common].filter((other) => other !== null).map((other) => 100 * (field / other - 1));
  if (offs.length === 0) return null;
  return rounded(offs.reduce((least, off) => (Math.abs(off) < Math.abs(least) ? off : least)));
}

/** Six digits are more than any of it is known to; NaN was never known. */
function rounded(value: number): number | null;
function rounded(value: number | null): number | null;
function rounded(value: number | null): number | null {
  return value === null || Number.isNaN(value) ? null : Number(value.toPrecision(6));
}
