/**
 * A sensor that has turned in its mounting during the trial: "up", as its orientation has it, looks elsewhere against the
 * other sensors than it did before, and stays there. The others are taken by their median, so that one cannot speak for
 * all; what pitches, rolls or twists the body to and fro is smoothed away or does not stay.
 *
 * Orientations follow a turn of the sensor at once, by its own gyroscope, and hold up against the body's accelerations.
 * While they cannot be believed (a reading clipped, stuck or long away) nothing is judged. Not told: a turn about the
 * vertical, which changes no up; and any turn in a rig of fewer than three sensors.
 */
import { DEG_PER_RAD, RAD_PER_DEG } from "../numeric/units.ts";
import { CONDITION, HAS_INERTIAL, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const KIND = "mounting changed";
const LEAST_SENSORS = 3;
/** Looks a second; nobody lets go faster. */
const LOOKS_HZ = 50;
/** Time constant of what is so now, and of what was so before, s. */
const NOW_S = 0.2;
const BEFORE_S = 30;
/** Filters find the vertical first, and again after doubt: four times their time constant of 3 s. */
const SETTLE_S = 3;
const DOUBT_S = 12;
/** Without readings for longer than this the vertical drifts off, s. */
const BRIDGED_S = 0.2;
/** Longer than half a beat of a body that twists. */
const ONSET_S = 0.6;
const QUIET_S = 1;
/** Back below this share of the threshold. */
const RELEASE = 2 / 3;
const DOUBTFUL = CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;

export class MountingChange {
  readonly #setup: HealthSetup;
  readonly #state: Hysteresis;
  /** Up in body axes, sensors x 3: at this look, and against the median of all, smoothed and long before. */
  readonly #up: Float64Array;
  readonly #now: Float64Array;
  readonly #before: Float64Array;
  readonly #begun: Uint8Array;
  readonly #lastInertialS: Float64Array;
  readonly #doubtUntilS: Float64Array;
  readonly #sorted: Float64Array;
  #lookS = Number.NEGATIVE_INFINITY;

  constructor(setup: HealthSetup) {
    const n = setup.sensors.length;
    this.#setup = setup;
    this.#state = new Hysteresis(n, ONSET_S, QUIET_S);
    this.#up = new Float64Array(3 * n);
    this.#now = new Float64Array(3 * n);
    this.#before = new Float64Array(3 * n);
    this.#begun = new Uint8Array(n);
    this.#lastInertialS = new Float64Array(n).fill(Number.NEGATIVE_INFINITY);
    this.#doubtUntilS = new Float64Array(n).fill(SETTLE_S);
    this.#sorted = new Float64Array(n);
  }

  /** Needs this sweep's broken readings marked. @param orientations as of the sweep before, sensors x 4 */
  observe(sweep: Sweep, orientations: Float64Array): void {
    const { timeS } = sweep;
    if (sweep.sensorCount < LEAST_SENSORS) return;
    for (let i = 0; i < sweep.sensorCount; i++) this.#doubt(sweep, i);
    const spanS = Math.min(timeS - this.#lookS, 1);
    if (spanS < 1 / LOOKS_HZ - 1e-4) return;
    this.#lookS = timeS;
    let believed = 0;
    for (let i = 0; i < sweep.sensorCount; i++) {
      this.#setUp(i, orientations);
      if (this.#isBelieved(i, timeS)) believed++;
    }
    if (believed < LEAST_SENSORS) return;
    for (let k = 0; k < 3; k++) this.#compare(k, believed, timeS, spanS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (!this.#isBelieved(i, timeS)) continue;
      if (this.#begun[i] === 0) this.#begin(i);
      this.#judge(i, timeS, spanS);
    }
  }

  #doubt({ timeS, present, conditions }: Sweep, i: number): void {
    if ((conditions[i]! & DOUBTFUL) !== 0) this.#doubtUntilS[i] = timeS + DOUBT_S;
    if ((present[i]! & HAS_INERTIAL) !== HAS_INERTIAL) return;
    const away = timeS - this.#lastInertialS[i]!;
    if (away > BRIDGED_S && away < Number.POSITIVE_INFINITY) this.#doubtUntilS[i] = timeS + DOUBT_S;
    this.#lastInertialS[i] = timeS;
  }

  #isBelieved(i: number, timeS: number): boolean {
    return timeS >= this.#doubtUntilS[i]! && timeS - this.#lastInertialS[i]! <= BRIDGED_S;
  }

  /** Third row of the rotation: the earth's vertical seen in body axes. */
  #setUp(i: number, q: Float64Array): void {
    const w = q[4 * i]!;
    const x = q[4 * i + 1]!;
    const y = q[4 * i + 2]!;
    const z = q[4 * i + 3]!;
    this.#up[3 * i] = 2 * (x * z - w * y);
    this.#up[3 * i + 1] = 2 * (y * z + w * x);
    this.#up[3 * i + 2] = 1 - 2 * (x * x + y * y);
  }

  /** Component `k` of every up against the median of those that can be believed. */
  #compare(k: number, believed: number, timeS: number, spanS: number): void {
    let at = 0;
    for (let i = 0; i < this.#begun.length; i++) {
      if (this.#isBelieved(i, timeS)) this.#sorted[at++] = this.#up[3 * i + k]!;
    }
    const median = middle(this.#sorted, believed);
    const weight = Math.min(1, spanS / NOW_S);
    for (let i = 0; i < this.#begun.length; i++) {
      const own = 3 * i + k;
      const against = this.#up[own]! - median;
      this.#now[own]! += (this.#begun[i] === 0 ? 1 : weight) * (against - this.#now[own]!);
    }
  }

  #begin(i: number): void {
    this.#begun[i] = 1;
    for (let k = 3 * i; k < 3 * i + 3; k++) this.#before[k] = this.#now[k]!;
  }

  #judge(i: number, timeS: number, spanS: number): void {
    let square = 0;
    for (let k = 3 * i; k < 3 * i + 3; k++) square += (this.#now[k]! - this.#before[k]!) ** 2;
    const angle = 2 * Math.asin(Math.min(1, Math.sqrt(square) / 2));
    const limit = this.#setup.thresholds.mountingChangeDeg * RAD_PER_DEG;
    const turn = this.#state.step(i, timeS, angle >= limit, angle < limit * RELEASE, angle);
    if (angle < limit * RELEASE && this.#state.on[i] === 0) {
      const weight = spanS / BEFORE_S;
      for (let k = 3 * i; k < 3 * i + 3; k++) this.#before[k]! += weight * (this.#now[k]! - this.#before[k]!);
    }
    if (turn === Turn.REPORT) {
      const detail = `turned by up to ${Math.round(this.#state.worst[i]! * DEG_PER_RAD)}° against the others`;
      this.#setup.book.raise(KIND, i, "alarm", this.#state.sinceS[i]!, detail);
    } else if (turn === Turn.END) this.#setup.book.clear(KIND, i, this.#state.lastBadS[i]!);
  }
}

/** Median of the first `count` values, which get sorted. */
function middle(values: Float64Array, count: number): number {
  for (let i = 1; i < count; i++) {
    const value = values[i]!;
    let j = i;
    for (; j > 0 && values[j - 1]! > value; j--) values[j] = values[j - 1]!;
    values[j] = value;
  }
  const half = count >> 1;
  return count % 2 === 1 ? values[half]! : (values[half - 1]! + values[half]!) / 2;
}
