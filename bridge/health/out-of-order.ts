/**
 * Sweeps that came twice, and sweeps that came after a later one: neither can be used. Each is counted; a flag says when
 * they are frequent.
 */
import type { FlagKind } from "../wire/flag.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingSum } from "./windows.ts";

const QUIET_S = 1;
const KINDS: readonly FlagKind[] = ["duplicate sweeps", "late sweeps"];
export const DUPLICATE = 0;
export const LATE = 1;

export class OutOfOrder {
  readonly #setup: HealthSetup;
  readonly #last = new RollingSum(KINDS.length, 1, 10);
  readonly #state = new Hysteresis(KINDS.length, 0, QUIET_S);
  readonly #limits: readonly number[];

  constructor(setup: HealthSetup) {
    const { duplicateSweepsShare, lateSweepsShare } = setup.thresholds;
    this.#setup = setup;
    this.#limits = [duplicateSweepsShare, lateSweepsShare];
  }

  /** A sweep was dropped, between two that were taken. @param what DUPLICATE or LATE */
  dropped(what: number): void {
    this.#last.add(what, 1);
  }

  observe(timeS: number): void {
    const { book, rateHz } = this.#setup;
    for (let row = 0; row < KINDS.length; row++) {
      const share = this.#last.sum(row) / rateHz;
      const bad = share > 0 && share >= this.#limits[row]! - 1e-9;
      const turn = this.#state.step(row, timeS, bad, share === 0, share);
      if (turn === Turn.END) book.clear(KINDS[row]!, -1, this.#state.lastBadS[row]!);
      if (turn !== Turn.REPORT) continue;
      const detail = `up to ${Math.round(this.#state.worst[row]! * 100)} % of sweeps in a second`;
      book.raise(KINDS[row]!, -1, "caution", this.#state.sinceS[row]!, detail);
    }
    this.#last.advance(timeS);
  }
}
