/**
 * From readings to episodes, many rows at once: a row turns on when it has been bad without a break for `onsetS`, and off
 * when it has been calm for `quietS`. Between bad and calm lies a band where nothing changes.
 */

/** What a detector has to write into the book. */
export const Turn = {
  NONE: 0,
  /** The row has just turned on, or is on and its detail is due for a refresh. */
  REPORT: 1,
  /** The row has just turned off. */
  END: 2,
} as const;
export type Turn = (typeof Turn)[keyof typeof Turn];

/** A flag's detail and severity are renewed once its first readings have come in, then at the pace one reads, s. */
const FIRST_REFRESH_S = 0.25;
const REFRESH_S = 1;
/** Durations are compared with this much rounding, s. */
const TICK_S = 1e-6;

export class Hysteresis {
  readonly on: Uint8Array;
  /** Onset of the episode that is on or about to be, s. */
  readonly sinceS: Float64Array;
  /** Last reading that was not calm, s. */
  readonly lastBadS: Float64Array;
  /** Greatest size given since the onset: what a flag's detail tells. */
  readonly worst: Float64Array;
  readonly #onsetS: number;
  readonly #quietS: number;
  readonly #pending: Uint8Array;
  readonly #refreshS: Float64Array;

  constructor(rows: number, onsetS: number, quietS: number) {
    this.on = new Uint8Array(rows);
    this.sinceS = new Float64Array(rows);
    this.lastBadS = new Float64Array(rows);
    this.worst = new Float64Array(rows);
    this.#onsetS = onsetS;
    this.#quietS = quietS;
    this.#pending = new Uint8Array(rows);
    this.#refreshS = new Float64Array(rows);
  }

  /** Takes one reading of a row. @param size how bad it is, in the detector's own measure */
  step(row: number, timeS: number, bad: boolean, calm = !bad, size = 0): Turn {
    if (this.on[row] === 0) {
      if (!bad) {
        this.#pending[row] = 0;
        return Turn.NONE;
      }
      if (this.#pending[row] === 0) {
        this.sinceS[row] = timeS;
        this.worst[row] = size;
      }
      this.#pending[row] = 1;
      this.worst[row] = Math.max(this.worst[row]!, size);
      if (timeS - this.sinceS[row]! < this.#onsetS - TICK_S) return Turn.NONE;
      this.on[row] = 1;
      this.lastBadS[row] = timeS;
      this.#refreshS[row] = timeS + FIRST_REFRESH_S;
      return Turn.REPORT;
    }
    this.worst[row] = Math.max(this.worst[row]!, size);
    if (!calm) this.lastBadS[row] = timeS;
    else if (timeS - this.lastBadS[row]! >= this.#quietS - TICK_S) {
      this.on[row] = 0;
      this.#pending[row] = 0;
      return Turn.END;
    }
    if (timeS < this.#refreshS[row]!) return Turn.NONE;
    this.#refreshS[row] = timeS + REFRESH_S;
    return Turn.REPORT;
  }
}
