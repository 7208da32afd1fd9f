/** What the hub itself reports: sensors it could not read, and that it started anew. */
import { CONDITION, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingSum } from "./windows.ts";

/** Sporadic failures closer together than this are one flag, s. */
const QUIET_S = 1;
const CAUTION_SHARE = 0.05;
const ALARM_SHARE = 0.25;
/** A restart is a moment; its flag stays up for so long to be seen, s. */
const RESTART_SHOWN_S = 10;

export class ReadErrors {
  readonly #setup: HealthSetup;
  readonly #failed: RollingSum;
  readonly #state: Hysteresis;
  /** The last read status that was not 0. */
  readonly #status: Uint8Array;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
    this.#failed = new RollingSum(setup.sensors.length, 1, 10);
    this.#state = new Hysteresis(setup.sensors.length, 0, QUIET_S);
    this.#status = new Uint8Array(setup.sensors.length);
  }

  /** Marks failed readings. */
  observe(sweep: Sweep): void {
    const { book, rateHz, thresholds, sensors } = this.#setup;
    this.#failed.advance(sweep.timeS);
    for (let i = 0; i < sensors.length; i++) {
      if (sweep.readStatus[i] !== 0) {
        this.#failed.add(i, 1);
        sweep.conditions[i]! |= CONDITION.READ_FAILED;
      }
      const failed = this.#failed.sum(i);
      const bad = failed > 0 && failed >= thresholds.readErrorsShare * rateHz - 1e-9;
      if (sweep.readStatus[i] !== 0) this.#status[i] = sweep.readStatus[i]!;
      const share = Math.min(1, failed / rateHz);
      const turn = this.#state.step(i, sweep.timeS, bad, sweep.readStatus[i] === 0, share);
      if (turn === Turn.REPORT) this.#report(i);
      else if (turn === Turn.END) book.clear("sensor read errors", i, this.#state.lastBadS[i]!);
    }
  }

  #report(i: number): void {
    const share = this.#state.worst[i]!;
    const severity = share >= ALARM_SHARE ? "alarm" : share >= CAUTION_SHARE ? "caution" : "notice";
    const detail = `up to ${Math.round(share * 100)} % of readings failed in a second, status ${this.#status[i]}`;
    this.#setup.book.raise("sensor read errors", i, severity, this.#state.sinceS[i]!, detail);
  }
}

export class HubRestarts {
  readonly #setup: HealthSetup;
  #shownUntilS = Number.NEGATIVE_INFINITY;
  #count = 0;
  #fresh = false;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
  }

  /** @param timeS hub time of the first sweep after the restart */
  restarted(timeS: number): void {
    this.#count++;
    this.#fresh = true;
    this.#shownUntilS = timeS + RESTART_SHOWN_S;
    const detail = this.#count === 1 ? "once in this run" : `${this.#count} times in this run`;
    this.#setup.book.raise("hub restarted", -1, "caution", timeS, detail);
  }

  /** @returns true for the first sweep after a restart: what was lost before it has its flag already */
  observe(sweep: Sweep): boolean {
    if (sweep.timeS >= this.#shownUntilS) this.#setup.book.clear("hub restarted", -1, this.#shownUntilS);
    const first = this.#fresh;
    this.#fresh = false;
    return first;
  }
}
