/** Sensors that fuse on board: whether their own orientation agrees with ours, by inclination and by heading. */
import { DEG_PER_RAD } from "../numeric/units.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const KIND = "on-board fusion differs";
/** Filters on both sides settle for some seconds. */
const ONSET_S = 5;
const QUIET_S = 3;
/** Calm below this share of the threshold. */
const RELEASE = 2 / 3;

export class OnBoardDifference {
  readonly #setup: HealthSetup;
  readonly #state: Hysteresis;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
    this.#state = new Hysteresis(setup.sensors.length, ONSET_S, QUIET_S);
  }

  /** After fusion. @param tilt RMS difference of inclination by sensor, rad; NaN for none @param turn of heading */
  observe(timeS: number, tilt: Float64Array, turn: Float64Array): void {
    const limit = this.#setup.thresholds.onBoardOffDeg / DEG_PER_RAD;
    for (let i = 0; i < tilt.length; i++) {
      if (Number.isNaN(tilt[i]!)) continue;
      const off = Math.max(tilt[i]!, turn[i]!);
      const change = this.#state.step(i, timeS, off >= limit, off < limit * RELEASE, off);
      if (change === Turn.REPORT) this.#report(i, tilt[i]! >= turn[i]! ? "inclination" : "heading");
      else if (change === Turn.END) this.#setup.book.clear(KIND, i, this.#state.lastBadS[i]!);
    }
  }

  #report(i: number, what: string): void {
    const detail = `${what} up to ${Math.round(this.#state.worst[i]! * DEG_PER_RAD)}° off`;
    this.#setup.book.raise(KIND, i, "caution", this.#state.sinceS[i]!, detail);
  }
}
