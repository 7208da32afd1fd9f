/** A silent link: told by the joiner, who watches the host clock; over with the first good sweep. */
import type { Sweep } from "../sweep.ts";
import type { HealthSetup } from "./setup.ts";

export class Silence {
  readonly #setup: HealthSetup;
  #silent = false;

  constructor(setup: HealthSetup) {
    this.#setup = setup;
  }

  /** Saying the same again changes nothing. @param timeS hub time, s, as far as it can be told */
  linkSilent(silent: boolean, timeS: number): void {
    if (silent === this.#silent) return;
    this.#silent = silent;
    if (silent) this.#setup.book.raise("link silent", -1, "alarm", timeS, "no sweeps arrive");
    else this.#setup.book.clear("link silent", -1, timeS);
  }

  /** @returns true when this sweep ends a silence: what was lost before it has its flag already */
  observe(sweep: Sweep): boolean {
    const ended = this.#silent;
    if (ended) {
      const lost = sweep.lostBefore === 0 ? "nothing was lost" : `${sweep.lostBefore} sweeps lost`;
      this.#setup.book.update("link silent", -1, lost);
      this.linkSilent(false, sweep.timeS);
    }
    return ended;
  }
}
