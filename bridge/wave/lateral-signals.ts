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
  #meanEast = 0;
  #meanNorth = 0;

  /** @param stations of the sensors, 0 nose to 1 tail tip */
  constructor(stations: readonly number[]) {
    this.#first = Float64Array.from(stations, (station) => Math.cos(Math.PI * station));
    this.#second = Float64Array.from(stations, (station) => Math.cos(2 * Math.PI * station));
  }

  /**
   * Takes a sweep.
   * @param orientations body axes to earth, 4 a sensor
   * @param trust as in sweep.ts
   * @param stepS time since the sweep taken before, s
   */
  step(sweep: Sweep, orientations: Float64Array, trust: Uint8Array, stepS: number): void {
    const { present, conditions } = sweep;
    const readings = sweep.values;
    const first = this.#first;
    const second = this.#second;
    const length = Math.sqrt(this.#meanEast * this.#meanEast + this.#meanNorth * this.#meanNorth);
    // No mean heading yet divides zero by zero: unknown.
    const cosine = this.#meanEast / length;
    const sine = this.#meanNorth / length;
    let sumEast = 0;
    let sumNorth = 0;
    let firstMode = 0;
    let secondMode = 0;
    let force = 0;
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
      sumEast += east;
      sumNorth += north;
      firstMode += first[i]! * lateral;
      secondMode += second[i]! * lateral;
      tangents++;
      if (!(present[i]! & HAS_ACCEL) || conditions[i]! & SPOILT) continue;
      const at = CHANNELS * i + ACCEL;
      const acrossY = cosine * (1 - 2 * (x * x + z * z)) - sine * 2 * (x * y - w * z);
      const acrossZ = cosine * 2 * (y * z - w * x) - sine * 2 * (x * z + w * y);
      force += lateral * readings[at]! + acrossY * readings[at + 1]! + acrossZ * readings[at + 2]!;
      forces++;
    }
    const { values } = this;
    // Zero tangents or forces divide zero by zero likewise.
    values[0] = (cosine * sumNorth - sine * sumEast) / tangents;
    values[1] = firstMode / tangents;
    values[2] = secondMode / tangents;
    values[3] = force / forces;
    if (tangents === 0) return;
    const share = length > 0 ? Math.min(1, stepS / HEADING_TAU_S) : 1;
    this.#meanEast += share * (sumEast / tangents - this.#meanEast);
    this.#meanNorth += share * (sumNorth / tangents - this.#meanNorth);
  }
}
