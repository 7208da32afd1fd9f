/**
 * Corrupt packets: frames that came but could not be read. The sweeps lost with them are theirs: while they explain the
 * loss, no other flag is raised for it.
 */
import type { Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingSum } from "./windows.ts";

const QUIET_S = 1;
/** A damaged delimiter makes one bad frame of two sweeps. */
const SWEEPS_PER_FRAME = 2;
const CAUTION_SHARE = 0.05;
const ALARM_SHARE = 0.25;

export class CorruptPackets {
  readonly #setup: HealthSetup;
  readonly #bad: RollingSum;
  /** Lost sweeps that the bad frames of the last second can still explain. */
  readonly #credit: RollingSum;
  readonly #state = new Hysteresis(1, 0, QUIET_S);
  #sweepSeen = false;
  /** Of this episode. */
  #total = 0;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
    this.#bad = new RollingSum(1, 1, 10);
    this.#credit = new RollingSum(1, 1, 10);
  }

  /** More bad frames. What comes before the first sweep is the rest of a packet cut by opening the port. */
  corruption(deltaBad: number, timeS: number): void {
    if (!this.#sweepSeen) return;
    this.#advance(timeS);
    this.#bad.add(0, deltaBad);
    this.#credit.add(0, deltaBad * SWEEPS_PER_FRAME);
    this.#total = this.#state.on[0] === 1 ? this.#total + deltaBad : this.#bad.sum(0);
    this.#step(timeS, deltaBad > 0);
  }

  /** @returns how many of the sweeps lost before this one no bad frame explains */
  observe(sweep: Sweep): number {
    this.#sweepSeen = true;
    this.#advance(sweep.timeS);
    const explained = Math.min(sweep.lostBefore, Math.max(0, this.#credit.sum(0)));
    this.#credit.add(0, -explained);
    this.#step(sweep.timeS, false);
    return sweep.lostBefore - explained;
  }

  #advance(timeS: number): void {
    this.#bad.advance(timeS);
    this.#credit.advance(timeS);
  }

  #step(timeS: number, fresh: boolean): void {
    const { book, rateHz, thresholds } = this.#setup;
    const bad = this.#bad.sum(0);
    const many = bad > 0 && bad >= thresholds.corruptPacketsShare * rateHz - 1e-9;
    const turn = this.#state.step(0, timeS, many, !fresh, bad / rateHz);
    if (turn === Turn.END) book.clear("corrupt packets", -1, this.#state.lastBadS[0]!);
    if (turn !== Turn.REPORT) return;
    const share = this.#state.worst[0]!;
    const severity = share >= ALARM_SHARE ? "alarm" : share >= CAUTION_SHARE ? "caution" : "notice";
    const detail = `${this.#total} unreadable, up to ${Math.round(share * rateHz)} in a second`;
    book.raise("corrupt packets", -1, severity, this.#state.sinceS[0]!, detail);
  }
}
