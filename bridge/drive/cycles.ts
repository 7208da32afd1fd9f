/**
 * The newest whole cycles of a signal: from one upward crossing of its middle line to the next. A crossing counts once the
 * signal has been well below the line, and its time is interpolated between the two samples that straddle it.
 */
import { HOLE_S, type SampleRing } from "./sample-ring.ts";

/** Cycles longer than this are not waited for, s. */
export const SLOWEST_CYCLE_S = 5;
/** Cycles compared at a time. */
export const MOST_CYCLES = 4;
/** Fewer are not called periodic. */
const LEAST_CYCLES = 2;
/** A period that differs more than this from the newest one belongs to another drive. */
const PERIOD_SPREAD = 0.03;
/** The newest crossing is at most this many periods old while the drive goes on. */
const PERIODS_TO_STOP = 1.5;
/** How far below the line counts as well below, as a share of half the range. */
const BELOW_SHARE = 0.2;

export class WholeCycles {
  /** Whole cycles found that agree in length; 0 when the signal does not repeat itself. */
  count = 0;
  startS = 0;
  endS = 0;
  /** The newest crossings, oldest first. */
  readonly #crossings = new Float64Array(MOST_CYCLES + 1);
  #crossingCount = 0;

  /** Of one cycle, s; NaN without cycles. */
  get periodS(): number {
    return this.count === 0 ? Number.NaN : (this.endS - this.startS) / this.count;
  }

  /** Start of the newest cycle, s. */
  get lastStartS(): number {
    return this.endS - this.periodS;
  }

  /**
   * Looks for cycles in one column of the newest samples.
   * @param middle the line
   * @param halfRange half the signal's range about it
   */
  find(ring: SampleRing, column: number, middle: number, halfRange: number): void {
    this.#findCrossings(ring, column, middle, BELOW_SHARE * halfRange);
    this.count = 0;
    const crossings = this.#crossings;
    const newest = this.#crossingCount - 1;
    if (newest < LEAST_CYCLES) return;
    const period = crossings[newest] - crossings[newest - 1];
    if (ring.timeS[ring.end - 1] - crossings[newest] > PERIODS_TO_STOP * period) return;
    let cycles = 1;
    while (
      cycles < newest &&
      Math.abs(crossings[newest - cycles] - crossings[newest - cycles - 1] - period) < PERIOD_SPREAD * period
    )
      cycles++;
    if (cycles < LEAST_CYCLES) return;
    this.count = cycles;
    this.startS = crossings[newest - cycles];
    this.endS = crossings[newest];
  }

  #findCrossings(
    { timeS, columns, end, count }: SampleRing,
    column: number,
    middle: number,
    below: number,
  ): void {
    const values = columns[column];
    const start = end - count;
    this.#crossingCount = 0;
    let armed = false;
    let upwardS = Number.NaN;
    for (let i = start; i < end; i++) {
      const now = values[i] - middle;
      const stepS = i > start ? timeS[i] - timeS[i - 1] : 0;
      if (stepS > HOLE_S) {
        this.#crossingCount = 0;
        armed = false;
      }
      if (now < -below) armed = true;
      if (i === start || !armed) continue;
      const before = values[i - 1] - middle;
      if (before <= 0 && now > 0) upwardS = timeS[i] - (stepS * now) / (now - before);
      if (now > below) {
        this.#add(upwardS);
        armed = false;
      }
    }
  }

  #add(crossingS: number): void {
    const crossings = this.#crossings;
    if (this.#crossingCount === crossings.length) crossings.copyWithin(0, 1);
    else this.#crossingCount++;
    crossings[this.#crossingCount - 1] = crossingS;
  }
}
