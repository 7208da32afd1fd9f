/**
 * Delivery: how many of the readings due have come. Whole sweeps lost are the rig's, readings missing from sweeps that
 * came are their sensor's; what corrupt packets, a silence or failed reads explain is flagged by those alone, but counts
 * here all the same.
 *
 * A sensor with a rate of its own owes a reading every `period` sweeps. Its k-th reading is missed once
 * (k + 1/2) period - 1/2 sweeps have come without any: at once for a sensor read in every sweep, and with half a period
 * to spare for one that is not in step with the hub. Magnetometers keep their own time and owe nothing.
 */
import { CONDITION, HAS_INERTIAL, HAS_ORIENTATION, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingSum } from "./windows.ts";

/** What is missing may have been overtaken: it is told when it has not come before so many further sweeps have. */
const LATE_SWEEPS = 4;
/** Losses closer together than this are one flag, s. */
const QUIET_S = 1;
const CAUTION_SHARE = 0.05;
const ALARM_SHARE = 0.25;
const LONG_S = 60;

export class Delivery {
  /** Share of readings that came over the last 60 s, per sensor. */
  readonly delivered60: Float64Array;
  /** Share of all readings lost over the last 60 s. */
  lostShare60 = 0;
  /** Sweeps that came in the last second. */
  sweepsPerS = 0;
  readonly #setup: HealthSetup;
  /** Sweeps from one reading due to the next, per sensor. */
  readonly #period: Float64Array;
  readonly #since: Uint32Array;
  readonly #missed: Uint32Array;
  /** Newly missed with this sweep. */
  readonly #newly: Float64Array;
  /** Unexplained losses of the last second and all of the last minute. Rows: sensors, then the rig. */
  readonly #lost1: RollingSum;
  readonly #lost60: RollingSum;
  readonly #due60 = new RollingSum(1, LONG_S, 60);
  readonly #came = new RollingSum(1, 1.1, 11);
  /** Sweeps missing before each of the last LATE_SWEEPS, oldest first. */
  readonly #missing = new Float64Array(LATE_SWEEPS);
  readonly #state: Hysteresis;

  constructor(setup: HealthSetup) {
    const count = setup.sensors.length;
    this.#setup = setup;
    this.#period = Float64Array.from(setup.sensors, (s) =>
      Math.max(1, setup.rateHz / (s.rateHz ?? setup.rateHz)),
    );
    this.delivered60 = new Float64Array(count).fill(1);
    this.#since = new Uint32Array(count);
    this.#missed = new Uint32Array(count);
    this.#newly = new Float64Array(count);
    this.#lost1 = new RollingSum(count + 1, 1, 10);
    this.#lost60 = new RollingSum(count + 1, LONG_S, 60);
    this.#state = new Hysteresis(count + 1, 0, QUIET_S);
  }

  /**
   * Needs failed readings marked; marks gaps.
   * @param unexplained of the sweeps lost before this one, those that nothing else explains
   */
  observe(sweep: Sweep, unexplained: number): void {
    const { timeS, stepS, lostBefore } = sweep;
    const rig = sweep.sensorCount;
    this.#lost1.advance(timeS);
    this.#lost60.advance(timeS);
    this.#due60.advance(timeS);
    this.#came.advance(timeS);
    this.#came.add(0, 1);
    this.#due60.add(0, 1);
    this.#lost1.add(rig, this.#missing[0]!);
    this.#missing.copyWithin(0, 1);
    this.#missing[LATE_SWEEPS - 1] = unexplained;
    if (lostBefore > 0) {
      this.#lost60.add(rig, lostBefore, stepS);
      this.#due60.add(0, lostBefore, stepS);
    }
    const emptySweep = this.#countMissing(sweep);
    if (emptySweep) {
      this.#lost1.add(rig, 1);
      this.#lost60.add(rig, 1);
    }
    for (let i = 0; i < rig; i++) {
      if (emptySweep || this.#newly[i] === 0) continue;
      this.#lost60.add(i, this.#newly[i]!);
      if ((sweep.conditions[i]! & CONDITION.READ_FAILED) === 0) this.#lost1.add(i, this.#newly[i]!);
    }
    for (let row = 0; row <= rig; row++) this.#judge(row, timeS);
    this.#share();
  }

  /** A sweep that counts as lost has come after all: nobody could use it, but it is not the link that loses. */
  cameLate(): void {
    for (let k = 0; k < LATE_SWEEPS; k++) {
      if (this.#missing[k] === 0) continue;
      this.#missing[k]!--;
      return;
    }
  }

  /** The link is silent: nothing came in the last second. */
  silent(): void {
    this.sweepsPerS = 0;
  }

  /** Marks gaps and counts readings newly missed. @returns true when no sensor gave the reading it owed */
  #countMissing(sweep: Sweep): boolean {
    let all = true;
    for (let i = 0; i < sweep.sensorCount; i++) {
      const present = sweep.present[i]!;
      const came = (present & HAS_INERTIAL) === HAS_INERTIAL || (present & HAS_ORIENTATION) !== 0;
      const period = this.#period[i]!;
      this.#since[i] = came ? 0 : this.#since[i]! + 1;
      const missed = came ? 0 : Math.max(0, Math.floor((this.#since[i]! + 0.5) / period - 0.5));
      this.#newly[i] = Math.max(0, missed - this.#missed[i]!);
      this.#missed[i] = missed;
      // What the hub could not read is not a sweep that came empty.
      if (this.#newly[i] === 0 || (sweep.conditions[i]! & CONDITION.READ_FAILED) !== 0) all = false;
      if (missed > 0 || sweep.lostBefore > 0) sweep.conditions[i]! |= CONDITION.GAP;
    }
    return all;
  }

  #judge(row: number, timeS: number): void {
    const { book, rateHz, thresholds, sensors } = this.#setup;
    const sensor = row < sensors.length ? row : -1;
    const due = sensor < 0 ? rateHz : rateHz / this.#period[row]!;
    const lost = this.#lost1.sum(row);
    const bad = lost > 0 && lost >= thresholds.lostSamplesShare * due - 1e-9;
    const share = Math.min(1, lost / due);
    const turn = this.#state.step(row, timeS, bad, lost === 0, share);
    if (turn === Turn.END) book.clear("lost samples", sensor, this.#state.lastBadS[row]!);
    if (turn !== Turn.REPORT) return;
    const worst = this.#state.worst[row]!;
    const severity = worst >= ALARM_SHARE ? "alarm" : worst >= CAUTION_SHARE ? "caution" : "notice";
    const what = sensor < 0 ? "sweeps" : "readings";
    const detail = `up to ${Math.round(worst * 100)} % of ${what} lost in a second`;
    book.raise("lost samples", sensor, severity, this.#state.sinceS[row]!, detail);
  }

  #share(): void {
    const count = this.delivered60.length;
    const due = this.#due60.sum(0);
    let lostShares = 0;
    for (let i = 0; i < count; i++) {
      const lost = this.#lost60.sum(count) + this.#lost60.sum(i) * this.#period[i]!;
      const share = Math.min(1, lost / due);
      this.delivered60[i] = 1 - share;
      lostShares += share;
    }
    this.lostShare60 = lostShares / count;
    this.sweepsPerS = this.#came.sumOfFull(0);
  }
}
