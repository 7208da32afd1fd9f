/**
 * When magnetic headings have to do without magnetometers: while the field is off along the whole body the headings are
 * held by the body, and by the magnetometers again once the field has been clean for a while. A flag is open from the
 * change until the magnetometers have drawn the headings back.
 */
import type { FlagBook } from "./flag-book.ts";

const CAUSE = "rig-wide magnetic interference";
const KIND = "heading held by the body";
/** The fusion ignores a disturbed field much longer; a magnet carried past need not change anything, s. */
const FALL_BACK_S = 5;
const CLEAN_S = 10;
/** Two time constants of the magnetic heading correction, s. */
const DRAWN_BACK_S = 18;

export class HeadingFallback {
  readonly #book: FlagBook;
  #held = false;
  /** Since when the field has been off, or clean, against the present state; NaN while it fits it. */
  #sinceS = Number.NaN;
  /** When the flag ends after a return. */
  #flagEndsS = Number.NaN;

  constructor(book: FlagBook) {
    this.#book = book;
  }

  /** After health has looked at the sweep. @returns whether the headings are to be held by the body now */
  observe(timeS: number): boolean {
    // Only an alarm: as a notice the same kind tells of a building's own field, which is the reference then.
    const off = this.#book.find(CAUSE, -1)?.severity === "alarm";
    if (off === this.#held) this.#sinceS = Number.NaN;
    else if (Number.isNaN(this.#sinceS)) this.#sinceS = timeS;
    else if (timeS - this.#sinceS >= (this.#held ? CLEAN_S : FALL_BACK_S)) this.#change(timeS);
    if (timeS >= this.#flagEndsS) {
      this.#book.clear(KIND, -1, timeS);
      this.#flagEndsS = Number.NaN;
    }
    return this.#held;
  }

  /** Headings are no longer to be magnetic: nothing is held, nothing is told. */
  leave(timeS: number): void {
    this.#held = false;
    this.#sinceS = Number.NaN;
    this.#flagEndsS = Number.NaN;
    this.#book.clear(KIND, -1, timeS);
  }

  #change(timeS: number): void {
    this.#held = !this.#held;
    this.#sinceS = Number.NaN;
    this.#flagEndsS = this.#held ? Number.NaN : timeS + DRAWN_BACK_S;
    const detail = this.#held ? "the field is off along the whole body" : "magnetometers take over again";
    this.#book.raise(KIND, -1, "notice", timeS, detail);
  }
}
