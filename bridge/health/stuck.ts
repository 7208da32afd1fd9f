/**
 * Stuck axes: one raw value repeated exactly, where it should move. Two kinds of evidence that it should:
 *
 * - noise: the model's white noise is a count or more, so a healthy reading repeats the one before with p <= 0.28 (noise
 *   s in counts, p = 1 / (2 s sqrt(pi))); at rest too.
 * - motion: the axis moved by MOVED_COUNTS just before, and noise is at least half a count (p <= 0.57).
 *
 * Data sheets give noise without the filter a hub may have set, which makes readings repeat more often. So the axis must
 * have changed in CHANGING_SHARE of its readings before it stood still, and a witness is needed: the other axes of the
 * same part still change as often, which bounds p to 0.4 for an axis filtered alike, 1e-12 for thirty repeats. When the
 * whole part stands still, three axes repeat together: where noise is the evidence that is its own witness (2e-9 at
 * p = 0.8), else a neighbour's same axis must be changing. An axis with less noise than half a count may rightly stand
 * still and is never called stuck.
 */
import { CHANNELS, CONDITION, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import { AXIS_NAMES, limitsOf, PARTS } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingMax } from "./windows.ts";

/** Fewest repeats, for sensors slower than 100 Hz. */
const LEAST_REPEATS = 25;
const NOISE_COUNTS = 1;
const NOISE_COUNTS_MOVING = 0.5;
const MOVED_COUNTS = 20;
const CHANGING_SHARE = 0.6;
/** Weight of the newest reading in the share of readings that changed: the last sixty or so count. */
const SHARE_WEIGHT = 1 / 32;
/** Motion just before the standstill is looked for in this time, s. */
const MOVED_WITHIN_S = 0.5;
/** An axis that moves for so long again is free, s. */
const QUIET_S = 0.5;

export class StuckAxes {
  readonly #setup: HealthSetup;
  /** Rows are sensors x CHANNELS. Size of a count; 0 where there is no such part. */
  readonly #count: Float64Array;
  readonly #noiseCounts: Float64Array;
  readonly #last: Float64Array;
  readonly #repeats: Uint32Array;
  readonly #stillSinceS: Float64Array;
  /** Counts moved within MOVED_WITHIN_S before the standstill. */
  readonly #movedCounts: Float64Array;
  /** Share of readings that differed from the one before, and that share when the standstill began. */
  readonly #changing: Float64Array;
  readonly #changedBefore: Float64Array;
  readonly #stuck: Uint8Array;
  readonly #high: RollingMax;
  readonly #negatedLow: RollingMax;
  readonly #state: Hysteresis;

  constructor(setup: HealthSetup) {
    const rows = setup.sensors.length * CHANNELS;
    this.#setup = setup;
    this.#count = new Float64Array(rows);
    this.#noiseCounts = new Float64Array(rows);
    setup.sensors.forEach((sensor, i) => {
      limitsOf(sensor, setup.rateHz).forEach((limits, p) => {
        if (limits === null) return;
        const start = i * CHANNELS + PARTS[p]!.at;
        this.#count.fill(limits.count, start, start + 3);
        this.#noiseCounts.fill(limits.noise / limits.count, start, start + 3);
      });
    });
    this.#last = new Float64Array(rows).fill(Number.NaN);
    this.#repeats = new Uint32Array(rows);
    this.#stillSinceS = new Float64Array(rows);
    this.#movedCounts = new Float64Array(rows);
    // An axis that never moved is judged by its noise.
    this.#changing = new Float64Array(rows).fill(1);
    this.#changedBefore = new Float64Array(rows);
    this.#stuck = new Uint8Array(rows);
    this.#high = new RollingMax(rows, MOVED_WITHIN_S, 5);
    this.#negatedLow = new RollingMax(rows, MOVED_WITHIN_S, 5);
    this.#state = new Hysteresis(setup.sensors.length, 0, QUIET_S);
  }

  /** Needs this sweep's clipped and failed readings marked: neither is called stuck. */
  observe(sweep: Sweep): void {
    this.#high.advance(sweep.timeS);
    this.#negatedLow.advance(sweep.timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      if ((sweep.conditions[i]! & CONDITION.READ_FAILED) !== 0) continue;
      for (let p = 0; p < PARTS.length; p++) {
        if ((sweep.present[i]! & PARTS[p]!.has) !== 0) this.#follow(sweep, i, p);
      }
    }
    for (let i = 0; i < sweep.sensorCount; i++) this.#judge(sweep, i);
  }

  #follow(sweep: Sweep, i: number, p: number): void {
    const start = i * CHANNELS + PARTS[p]!.at;
    for (let row = start; row < start + 3; row++) {
      const value = sweep.raw[row]!;
      const same = value === this.#last[row];
      if (same) {
        if (this.#repeats[row] === 0) {
          this.#changedBefore[row] = this.#changing[row]!;
          this.#movedCounts[row] = (this.#high.max(row) + this.#negatedLow.max(row)) / this.#count[row]!;
        }
        this.#repeats[row]!++;
      } else {
        this.#repeats[row] = 0;
        this.#stillSinceS[row] = sweep.timeS;
        this.#last[row] = value;
        this.#stuck[row] = 0;
      }
      this.#changing[row]! += SHARE_WEIGHT * ((same ? 0 : 1) - this.#changing[row]!);
      this.#high.put(row, value);
      this.#negatedLow.put(row, -value);
    }
  }

  #judge(sweep: Sweep, i: number): void {
    let any = false;
    for (let p = 0; p < PARTS.length; p++) {
      if ((sweep.present[i]! & PARTS[p]!.has) === 0) continue;
      const clipped = (sweep.conditions[i]! & PARTS[p]!.clipped) !== 0;
      const start = i * CHANNELS + PARTS[p]!.at;
      for (let row = start; row < start + 3; row++) {
        if (!clipped && this.#isStill(row, sweep.timeS) && this.#shouldMove(row, start, sweep.timeS)) {
          this.#stuck[row] = 1;
        }
      }
    }
    for (let row = i * CHANNELS; row < (i + 1) * CHANNELS; row++) any ||= this.#stuck[row] === 1;
    if (any) sweep.conditions[i]! |= CONDITION.STUCK;
    const turn = this.#state.step(i, sweep.timeS, any);
    if (turn === Turn.REPORT && any) this.#report(i);
    else if (turn === Turn.END) this.#setup.book.clear("stuck axis", i, this.#state.lastBadS[i]!);
  }

  #isStill(row: number, timeS: number): boolean {
    if (this.#repeats[row]! < LEAST_REPEATS) return false;
    return timeS - this.#stillSinceS[row]! >= this.#setup.thresholds.stuckAxisS - 1e-6;
  }

  #shouldMove(row: number, start: number, timeS: number): boolean {
    const noisy = this.#noiseCounts[row]! >= NOISE_COUNTS;
    const moved = this.#movedCounts[row]! >= MOVED_COUNTS && this.#noiseCounts[row]! >= NOISE_COUNTS_MOVING;
    if ((!noisy && !moved) || this.#changedBefore[row]! < CHANGING_SHARE) return false;
    let still = 0;
    let changing = 0;
    for (let other = start; other < start + 3; other++) {
      if (this.#isStill(other, timeS)) still++;
      else if (this.#changing[other]! >= CHANGING_SHARE) changing++;
    }
    if (still + changing < 3) return false;
    return changing > 0 || noisy || this.#isChanging(row - CHANNELS) || this.#isChanging(row + CHANNELS);
  }

  #isChanging(row: number): boolean {
    return row >= 0 && row < this.#changing.length && this.#changing[row]! >= CHANGING_SHARE;
  }

  #report(i: number): void {
    const parts: string[] = [];
    let sinceS = Number.POSITIVE_INFINITY;
    for (const { name, at } of PARTS) {
      const axes = AXIS_NAMES.filter((_, k) => this.#stuck[i * CHANNELS + at + k] === 1);
      for (let k = 0; k < 3; k++) {
        const row = i * CHANNELS + at + k;
        if (this.#stuck[row] === 1) sinceS = Math.min(sinceS, this.#stillSinceS[row]!);
      }
      if (axes.length > 0) parts.push(`${name} ${axes.join(", ")}`);
    }
    this.#setup.book.raise("stuck axis", i, "alarm", sinceS, `${parts.join("; ")} repeats one value`);
  }
}
