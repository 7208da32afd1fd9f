/**
 * Headroom: the share of the measuring range that the last second left free, per gyroscope and accelerometer; a caution
 * before anything is clipped. Once it is, the saturation flag alone says so.
 */
import { CHANNELS, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import { AXIS_NAMES, limitsOf, PARTS } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingMax } from "./windows.ts";

/** Gyro and accel; a magnetometer's range is many times the Earth's field. */
const WATCHED = 2;
const AXES = WATCHED * 3;
/** A signal that clips passes through its last tenth of range first: wait and see which of the two it is, s. */
const ONSET_S = 0.3;
/** The window of a second already holds a peak that long. */
const QUIET_S = 0;
/** Ends when this much more than the threshold is free again. */
const RELEASE = 0.03;

export class Headroom {
  /** Share of range free over the last second, per sensor, 0 .. 1. */
  readonly gyro: Float64Array;
  readonly accel: Float64Array;
  readonly #setup: HealthSetup;
  /** sensors x parts */
  readonly #range: Float64Array;
  /** sensors x AXES */
  readonly #peak: RollingMax;
  readonly #state: Hysteresis;

  constructor(setup: HealthSetup) {
    const count = setup.sensors.length;
    this.#setup = setup;
    this.gyro = new Float64Array(count).fill(1);
    this.accel = new Float64Array(count).fill(1);
    this.#range = Float64Array.from(
      setup.sensors.flatMap((sensor) =>
        limitsOf(sensor, setup.rateHz)
          .slice(0, WATCHED)
          .map((l) => l!.range),
      ),
    );
    this.#peak = new RollingMax(count * AXES, 1, 10);
    this.#state = new Hysteresis(count, ONSET_S, QUIET_S);
  }

  /** Needs this sweep's saturation told to the book. */
  observe(sweep: Sweep): void {
    const { book, thresholds } = this.#setup;
    this.#peak.advance(sweep.timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      this.#measure(sweep, i);
      const gyro = book.find("gyro saturation", i) === null ? this.gyro[i]! : 1;
      const accel = book.find("accel saturation", i) === null ? this.accel[i]! : 1;
      const free = Math.min(gyro, accel);
      const low = free < thresholds.lowHeadroomShare;
      const calm = free >= thresholds.lowHeadroomShare + RELEASE;
      const turn = this.#state.step(i, sweep.timeS, low, calm, 1 - free);
      if (turn === Turn.REPORT) this.#report(i, gyro <= accel ? 0 : 1);
      else if (turn === Turn.END) book.clear("low headroom", i, sweep.timeS);
    }
  }

  #measure(sweep: Sweep, i: number): void {
    for (let p = 0; p < WATCHED; p++) {
      const here = (sweep.present[i]! & PARTS[p]!.has) !== 0;
      let peak = 0;
      for (let k = 0; k < 3; k++) {
        const row = i * AXES + p * 3 + k;
        if (here) this.#peak.put(row, Math.abs(sweep.raw[i * CHANNELS + PARTS[p]!.at + k]!));
        peak = Math.max(peak, this.#peak.max(row));
      }
      const free = Math.max(0, 1 - peak / this.#range[i * WATCHED + p]!);
      (p === 0 ? this.gyro : this.accel)[i] = free;
    }
  }

  #report(i: number, p: number): void {
    let axis = 0;
    for (let k = 1; k < 3; k++) {
      if (this.#peak.max(i * AXES + p * 3 + k) > this.#peak.max(i * AXES + p * 3 + axis)) axis = k;
    }
    const left = `${Math.round((1 - this.#state.worst[i]!) * 100)} % left on ${AXIS_NAMES[axis]}`;
    this.#setup.book.raise(
      "low headroom",
      i,
      "caution",
      this.#state.sinceS[i]!,
      `${PARTS[p]!.name}: ${left}`,
    );
  }
}
