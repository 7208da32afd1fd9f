/** The hub's clock against the computer's: how far apart they run, once that has been so for a while. */
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const KIND = "clock drift";
/** A busy computer's first arrivals may be late by tens of ms; the estimate has left them behind after this, s. */
const ONSET_S = 15;
const QUIET_S = 15;
/** Calm below this share of the threshold. */
const RELEASE = 0.8;

export class ClockDrift {
  readonly #setup: HealthSetup;
  readonly #state = new Hysteresis(1, ONSET_S, QUIET_S);

  constructor(setup: HealthSetup) {
    this.#setup = setup;
  }

  /** @param ppm as in clock/drift.ts, positive when the hub is fast; null while nothing is known */
  observe(timeS: number, ppm: number | null): void {
    if (ppm === null) return;
    const limit = this.#setup.thresholds.clockDriftPpm;
    const size = Math.abs(ppm);
    const turn = this.#state.step(0, timeS, size >= limit, size < limit * RELEASE, size);
    if (turn === Turn.END) this.#setup.book.clear(KIND, -1, this.#state.lastBadS[0]!);
    if (turn !== Turn.REPORT) return;
    const detail = `the hub's clock runs ${size.toFixed(0)} ppm ${ppm > 0 ? "fast" : "slow"}`;
    this.#setup.book.raise(KIND, -1, "caution", this.#state.sinceS[0]!, detail);
  }
}
