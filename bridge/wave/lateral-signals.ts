/**
 * What a body that beats does sideways, in four numbers a sweep, whatever the number of sensors: the mean of the tangents'
 * lateral components, their first two bending modes (cosines along the body: a travelling wave drives both, a quarter
 * beat apart), and the mean lateral acceleration, in which a body that sways without bending shows.
 *
 * Lateral is across the slow mean of the body's heading; only a steady reference is needed, not the travel axis itself.
 */
import { ACCEL, CHANNELS, CONDITION, HAS_ACCEL, type Sweep, TRUST } from "../sweep.ts";

export const SIGNAL_COUNT = 4;
/** Time constant of the mean heading, s: slower than a beat, quicker than a turn; ours, no source. */
const HEADING_TAU_S = 2;
const SPOILT = CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;

export class LateralSignals {
  /** Sine of the mean lateral angle, first and second bending mode of the sines, acceleration (m/s²); NaN where unknown. Borrowed. */
  readonly values = new Float64Array(SIGNAL_COUNT);
  readonly #first: Float64Array;
  readonly #second: Float64Array;
  /** Slow mean of the tangents, earth axes; zero before the first sweep. */
  readonly #mean = new Float64Array(2);
  readonly #sum = new Float64Array(2);

  /** @param stations of the sensors, 0 nose to 1 tail tip */
  constructor(stations: readonly number[]) {
    this.#first = Float64Array.from(stations, (station) => Math.cos(Math.PI * station));
    this.#second = Float64Array.from(stations, (station) => Math.cos(2 * Math.PI * station));
  }

  /** @param orientations body axes to earth, 4 a sensor @param trust as in sweep.ts */
  step(sweep: Sweep, orientations: Float64Array, trust: Uint8Array): void {
    const { values } = this;
    const sum = this.#sum.fill(0);
    const mean = this.#mean;
    const length = Math.sqrt(mean[0]! * mean[0]! + mean[1]! * mean[1]!);
    const cosine = mean[0]! / length;
    const sine = mean[1]! / length;
    values.fill(0);
    let tangents = 0;
    let forces = 0;
    for (let i = 0; i < trust.length; i++) {
      if (trust[i] === TRUST.LOST) continue;
      const w = orientations[4 * i]!;
      const x = orientations[4 * i + 1]!;
      const y = orientations[4 * i + 2]!;
      const z = orientations[4 * i + 3]!;
      const east = 1 - 2 * (y * y + z * z);
      const north = 2 * (x * y + w * z);
      const lateral = cosine * north - sine * east;
      sum[0]! += east;
      sum[1]! += north;
      values[0]! += lateral;
      values[1]! += this.#first[i]! * lateral;
      values[2]! += this.#second[i]! * lateral;
      tangents++;
      if (!(sweep.present[i]! & HAS_ACCEL) || sweep.conditions[i]! & SPOILT) continue;
      const at = CHANNELS * i + ACCEL;
      const fx = sweep.values[at]!;
      const fy = sweep.values[at + 1]!;
      const fz = sweep.values[at + 2]!;
      const eastward = east * fx + 2 * (x * y - w * z) * fy + 2 * (x * z + w * y) * fz;
      const northward = north * fx + (1 - 2 * (x * x + z * z)) * fy + 2 * (y * z - w * x) * fz;
      values[3]! += cosine * northward - sine * eastward;
      forces++;
    }
    // Zero tangents or forces, or no mean heading yet, divide zero by zero: unknown.
    values[0]! /= tangents;
    values[1]! /= tangents;
    values[2]! /= tangents;
    values[3]! /= forces;
    if (tangents === 0) return;
    const share = length > 0 ? Math.min(1, sweep.stepS / HEADING_TAU_S) : 1;
    mean[0]! += share * (sum[0]! / tangents - mean[0]!);
    mean[1]! += share * (sum[1]! / tangents - mean[1]!);
  }
}
