/**
 * What is out of specification while a sensor lies still: noise, gyroscope bias, gravity and the field's norm. Judged once
 * a window of still time (rest-meter.ts); a flag stays until a later window is in order, however long the body moves
 * between them, since motion cures none of these.
 */
import { DEG_PER_RAD, RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import { CONDITION, type Sweep } from "../sweep.ts";
import type { FlagKind, Severity } from "../wire/flag.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import { limitsOf } from "./limits.ts";
import { type RestFigures, RestMeter } from "./rest-meter.ts";
import type { HealthSetup } from "./setup.ts";

/** What a sensor's data sheet allows at rest, SI. */
export interface Allowed {
  /** One-sided densities, what rounding to whole counts adds included. */
  readonly gyroNoise: number;
  readonly accelNoise: number;
  /** Norms: each axis may have the data sheet's whole offset. */
  readonly gyroBias: number;
  readonly accelBias: number;
  /** rad/s; Infinity where the model does not say. */
  readonly instability: number;
  readonly hasMag: boolean;
}

/** Gravity without a site: from equator to pole normal gravity is within this of the standard one, m/s². */
export const GRAVITY_SPREAD = 0.027;
/** Fewest magnetometers at rest whose median tells what the field here is. */
const LEAST_FIELDS = 3;
const SECONDS_PER_HOUR = 3600;
/** In order again below this share of what is allowed. */
const RELEASE = 0.9;
/** Three times what is allowed is past all doubt. */
const ALARM = 3;

export class AtRest {
  readonly meter: RestMeter;
  readonly #setup: HealthSetup;
  readonly #allowed: readonly Allowed[];
  readonly #noise: Hysteresis;
  readonly #bias: Hysteresis;
  readonly #gravity: Hysteresis;
  readonly #field: Hysteresis;
  readonly #fields: Float64Array;

  constructor(setup: HealthSetup) {
    const n = setup.sensors.length;
    const state = () => new Hysteresis(n, 0, 0);
    this.#setup = setup;
    this.meter = new RestMeter(setup, setup.thresholds.restS);
    this.#allowed = setup.sensors.map((sensor) => allowedAtRest(sensor, setup.rateHz));
    this.#noise = state();
    this.#bias = state();
    this.#gravity = state();
    this.#field = state();
    this.#fields = new Float64Array(n);
  }

  /** Needs this sweep's broken and disturbed readings marked. */
  observe(sweep: Sweep): void {
    this.meter.observe(sweep);
    const { windowEnded, window } = this.meter;
    for (let i = 0; i < windowEnded.length; i++) {
      if (windowEnded[i] === 0) continue;
      this.#judgeNoise(i, sweep.timeS, window);
      this.#judgeBias(i, sweep.timeS, window);
      this.#judgeGravity(i, sweep.timeS, window);
      // Interference says so itself.
      const disturbed = (sweep.conditions[i]! & CONDITION.MAG_DISTURBED) !== 0;
      if (this.#allowed[i]!.hasMag && !disturbed) this.#judgeField(i, sweep.timeS, window);
    }
  }

  #judgeNoise(i: number, timeS: number, { gyroNoise, accelNoise }: RestFigures): void {
    const allowed = this.#allowed[i]!;
    const gyro = gyroNoise[i]! / allowed.gyroNoise;
    const accel = accelNoise[i]! / allowed.accelNoise;
    // Not known before half a minute.
    const wander = (this.meter.gyroInstability[i]! || 0) / allowed.instability;
    const worst = Math.max(gyro, accel, wander);
    this.#tell("noise at rest", this.#noise, i, timeS, worst / this.#setup.thresholds.restNoiseFactor, () => {
      if (worst === wander) {
        const perHour = this.meter.gyroInstability[i]! * DEG_PER_RAD * SECONDS_PER_HOUR;
        return `gyro bias wanders by ${perHour.toFixed(0)} °/h, ${worst.toFixed(1)} times its model's`;
      }
      return `${worst === gyro ? "gyro" : "accel"} ${worst.toFixed(1)} times as noisy as its model`;
    });
  }

  #judgeBias(i: number, timeS: number, { gyroBias }: RestFigures): void {
    const rate = Math.hypot(gyroBias[3 * i]!, gyroBias[3 * i + 1]!, gyroBias[3 * i + 2]!);
    const share = rate / (this.#setup.thresholds.restGyroBiasShare * this.#allowed[i]!.gyroBias);
    const state = this.#bias;
    this.#tell(
      "gyro bias",
      state,
      i,
      timeS,
      share,
      () => `turns at ${(rate * DEG_PER_RAD).toFixed(2)} °/s at rest`,
    );
  }

  #judgeGravity(i: number, timeS: number, { gravity }: RestFigures): void {
    const { gravityMPerS2, thresholds } = this.#setup;
    const expected = gravityMPerS2 ?? STANDARD_GRAVITY;
    const spread = gravityMPerS2 === null ? GRAVITY_SPREAD : 0;
    const off = gravity[i]! - expected;
    const share = Math.abs(off) / (thresholds.restGravityShare * this.#allowed[i]!.accelBias + spread);
    this.#tell("gravity at rest", this.#gravity, i, timeS, share, () => {
      const milliG = Math.round((1000 * off) / STANDARD_GRAVITY);
      return `gravity reads ${gravity[i]!.toFixed(2)} m/s², ${signed(milliG)} mg off`;
    });
  }

  /** Off both the Earth's field at the site and what most of the others measure. */
  #judgeField(i: number, timeS: number, { fieldUT }: RestFigures): void {
    const { expectedField, thresholds } = this.#setup;
    const common = this.#commonField(fieldUT);
    const offSite = expectedField === null ? Number.NaN : fieldUT[i]! / expectedField.normUT - 1;
    const offOthers = fieldUT[i]! / common - 1;
    const off = Math.abs(offOthers) < Math.abs(offSite) || Number.isNaN(offSite) ? offOthers : offSite;
    if (Number.isNaN(off)) return;
    this.#tell("field at rest", this.#field, i, timeS, Math.abs(off) / thresholds.restFieldShare, () => {
      return `field ${fieldUT[i]!.toFixed(1)} µT, ${signed(Math.round(100 * off))} % off`;
    });
  }

  /** Median norm of all that have lain still; NaN of too few. */
  #commonField(fieldUT: Float64Array): number {
    let count = 0;
    for (const norm of fieldUT) if (norm > 0) this.#fields[count++] = norm;
    return count < LEAST_FIELDS ? Number.NaN : this.#fields.subarray(0, count).sort()[count >> 1]!;
  }

  /** @param size share of what is allowed: 1 and more is too much */
  #tell(
    kind: FlagKind,
    state: Hysteresis,
    i: number,
    timeS: number,
    size: number,
    detail: () => string,
  ): void {
    const turn = state.step(i, timeS, size >= 1, size < RELEASE, size);
    const severity: Severity = size >= ALARM ? "alarm" : "caution";
    if (turn === Turn.REPORT) {
      const startS = timeS - this.meter.window.stillS[i]!;
      this.#setup.book.raise(kind, i, severity, startS, detail());
    } else if (turn === Turn.END) this.#setup.book.clear(kind, i, timeS);
  }
}

function signed(value: number): string {
  return value < 0 ? `−${-value}` : `+${value}`;
}

export function allowedAtRest(sensor: HealthSetup["sensors"][number], hubRateHz: number): Allowed {
  const { gyro, accel, mag } = sensor.model;
  const [gyroLimits, accelLimits] = limitsOf(sensor, hubRateHz);
  // Rounding adds a variance of a twelfth of a count's square to each reading.
  const density = ({ noise, count, rateHz }: NonNullable<typeof gyroLimits>) =>
    Math.sqrt((noise * noise + (count * count) / 12) / (rateHz / 2));
  return {
    gyroNoise: density(gyroLimits!),
    accelNoise: density(accelLimits!),
    gyroBias: Math.sqrt(3) * Math.max(gyro.biasDegPerS * RAD_PER_DEG, gyroLimits!.count),
    accelBias: Math.sqrt(3) * Math.max((accel.biasMilliG * STANDARD_GRAVITY) / 1000, accelLimits!.count),
    instability: ((gyro.biasInstabilityDegPerH ?? Number.POSITIVE_INFINITY) * RAD_PER_DEG) / SECONDS_PER_HOUR,
    hasMag: mag !== undefined,
  };
}
