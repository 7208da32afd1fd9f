/**
 * The drive's own readings between their ticks. They come at their own times, uneven, now and then lost: what the drive did
 * at a sweep's time is the cubic through the two readings before it and the two after, so it is known one reading later.
 */
import { cubicWeights } from "../numeric/cubic.ts";

/** Readings further apart than this many usual intervals have lost too much between them. */
const WIDEST_GAP = 3.5;
/** Weight of the newest interval in the usual one. */
const INTERVAL_WEIGHT = 0.05;

export class ReferenceTrack {
  /** What `at` found: rad and m, NaN where the drive gives none. */
  yaw = Number.NaN;
  sway = Number.NaN;
  /** Readings that were not later than the one before. */
  outOfOrder = 0;
  readonly #timeS = new Float64Array(4);
  readonly #yaw = new Float64Array(4);
  readonly #sway = new Float64Array(4);
  readonly #weights = new Float64Array(4);
  #count = 0;
  #usualS = Number.NaN;

  /** Start and end of the stretch that is known since the last reading, s. */
  get fromS(): number {
    return this.#timeS[1];
  }
  get toS(): number {
    return this.#timeS[2];
  }

  /** Whether too many readings were lost to say what the drive did in the stretch. */
  get hole(): boolean {
    return this.toS - this.fromS > WIDEST_GAP * this.#usualS;
  }

  /**
   * Takes a reading.
   * @returns true when another stretch of the past, from `fromS` to `toS`, is known
   */
  add(timeS: number, yaw: number, sway: number): boolean {
    const stepS = timeS - this.#timeS[3];
    if (this.#count > 0 && !(stepS > 0)) {
      this.outOfOrder++;
      return false;
    }
    if (this.#count === 1) this.#usualS = stepS;
    if (this.#count > 1)
      this.#usualS += INTERVAL_WEIGHT * (Math.min(stepS, WIDEST_GAP * this.#usualS) - this.#usualS);
    for (const kept of [this.#timeS, this.#yaw, this.#sway]) kept.copyWithin(0, 1);
    this.#timeS[3] = timeS;
    this.#yaw[3] = yaw;
    this.#sway[3] = sway;
    this.#count = Math.min(4, this.#count + 1);
    return this.#count === 4;
  }

  /** Leaves in `yaw` and `sway` what the drive did at a time from `fromS` to `toS`. */
  at(timeS: number): void {
    const w = this.#weights;
    cubicWeights(w, timeS, this.#timeS);
    const yaw = this.#yaw;
    const sway = this.#sway;
    this.yaw = w[0] * yaw[0] + w[1] * yaw[1] + w[2] * yaw[2] + w[3] * yaw[3];
    this.sway = w[0] * sway[0] + w[1] * sway[1] + w[2] * sway[2] + w[3] * sway[3];
  }
}
