/**
 * Notices a silent link: silent when host time exceeds the last arrival by more than the limit.
 *
 * The rule is evaluated in two ways that agree. Live, a timer asks it every few tens of milliseconds, so that silence
 * shows while it lasts. At every chunk, live or on replay, it is asked with the chunk's arrival time *before* the chunk
 * counts as an arrival. A timer that found silence did so before the next chunk came, so that chunk finds it too, and what
 * a timer missed the chunk still finds: the silences, and the times they began, depend on the recorded arrivals alone.
 * Only a silence that nothing follows, at the very end of a trial, is seen live and not on replay.
 *
 * Only arrivals move the mark, also backwards: a host clock that is set back delays the rule for one silence at most.
 */
export class SilenceWatch {
  readonly #limitMs: number;
  #lastArrivalMs = Number.NaN;
  #silent = false;

  /** @param limitMs longest time without an arrival that is not silence */
  constructor(limitMs: number) {
    this.#limitMs = limitMs;
  }

  /** Something came: silence is over. Ask `hostTime` with the same time first, or a silence that ends here goes unseen. */
  bytesArrived(hostTimeMs: number): void {
    this.#lastArrivalMs = hostTimeMs;
    this.#silent = false;
  }

  /** Host time passes. Before the first arrival nothing is silent. */
  hostTime(hostTimeMs: number): void {
    if (hostTimeMs - this.#lastArrivalMs > this.#limitMs) this.#silent = true;
  }

  get silent(): boolean {
    return this.#silent;
  }

  /** When the limit ran out, host ms; null while not silent. */
  get silentSinceMs(): number | null {
    return this.#silent ? this.#lastArrivalMs + this.#limitMs : null;
  }
}
