/** Range: what gyroscopes and accelerometers leave free while the body moves as hard as it will. */
import { DEG_PER_RAD, RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_ACCEL, HAS_GYRO, type Sweep } from "../sweep.ts";
import { type CheckSetup, type Finding, figure, inUse, type JudgedFigure, type Step } from "./step.ts";

/** A beat is hard all of it when it has been fast within this time, s. */
const BEAT_S = 1;
const CLIPPED = CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED;

export class RangeStep implements Step {
  readonly toDo = "Move the body as hard as it will.";
  readonly #setup: CheckSetup;
  /** Largest reading of any axis, SI. */
  readonly #peakRate: Float64Array;
  readonly #peakForce: Float64Array;
  readonly #clipped: Uint32Array;
  #hardS = 0;
  #fastS = Number.NEGATIVE_INFINITY;

  constructor(setup: CheckSetup) {
    const n = setup.sensors.length;
    this.#setup = setup;
    this.#peakRate = new Float64Array(n);
    this.#peakForce = new Float64Array(n);
    this.#clipped = new Uint32Array(n);
  }

  observe(sweep: Sweep): void {
    const { timeS, stepS, raw, present, conditions, sensorCount } = sweep;
    const hard = this.#setup.limits.hardDegPerS * RAD_PER_DEG;
    for (let i = 0; i < sensorCount; i++) {
      const at = i * CHANNELS;
      if ((present[i]! & HAS_GYRO) !== 0) {
        const rate = largest(raw, at + GYRO);
        this.#peakRate[i] = Math.max(this.#peakRate[i]!, rate);
        if (rate >= hard) this.#fastS = timeS;
      }
      if ((present[i]! & HAS_ACCEL) !== 0)
        this.#peakForce[i] = Math.max(this.#peakForce[i]!, largest(raw, at + ACCEL));
      if ((conditions[i]! & CLIPPED) !== 0) this.#clipped[i]!++;
    }
    if (timeS - this.#fastS <= BEAT_S) this.#hardS += Math.min(stepS, BEAT_S);
  }

  finding(isOut: readonly boolean[]): Finding {
    const { limits } = this.#setup;
    const share = Math.min(1, this.#hardS / limits.hardS);
    const used = inUse(isOut);
    const text = `moved hard for ${this.#hardS.toFixed(1)} s, ${limits.hardS} s are needed: some sensor faster than ${limits.hardDegPerS} °/s`;
    return {
      share,
      missing: share < 1 ? [{ sensor: -1, text }] : [],
      figures: used.flatMap((i) => this.#figures(i)),
      faults: [],
      notes: [],
    };
  }

  #figures(sensor: number): JudgedFigure[] {
    const { gyro, accel } = this.#setup.models[sensor]!;
    const least = 100 * this.#setup.limits.lowHeadroomShare;
    const rate = this.#peakRate[sensor]! * DEG_PER_RAD;
    const force = this.#peakForce[sensor]! / STANDARD_GRAVITY;
    return [
      figure(100 * Math.max(0, 1 - rate / gyro.rangeDegPerS), {
        name: "gyroscope headroom",
        sensor,
        unit: "%",
        digits: 0,
        least,
        advice: "set a larger gyroscope range on the hub, and in its model",
      }),
      figure(100 * Math.max(0, 1 - force / accel.rangeG), {
        name: "accelerometer headroom",
        sensor,
        unit: "%",
        digits: 0,
        least,
        advice: "set a larger accelerometer range on the hub, and in its model",
      }),
      figure(this.#clipped[sensor]!, {
        name: "clipped readings",
        sensor,
        unit: "",
        digits: 0,
        most: 0,
        advice: "it moves beyond what it can measure: set a larger range on the hub, and in its model",
      }),
    ];
  }
}

function largest(raw: Float64Array, at: number): number {
  return Math.max(Math.abs(raw[at]!), Math.abs(raw[at + 1]!), Math.abs(raw[at + 2]!));
}
