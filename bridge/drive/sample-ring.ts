/**
 * The last samples of several signals on one clock, as flat arrays. Every sample is written twice, one capacity apart, so
 * that any window of the past lies in one piece: [end - n, end) of `timeS` and of each column.
 */
import { cubicWeights } from "../numeric/cubic.ts";

/** No sample for this long is a hole, across which nothing is interpolated, s. */
export const HOLE_S = 0.25;

export class SampleRing {
  readonly capacity: number;
  /** s, increasing within a window. */
  readonly timeS: Float64Array;
  readonly columns: readonly Float64Array[];
  #written = 0;
  readonly #weights = new Float64Array(4);

  constructor(columnCount: number, capacity: number) {
    this.capacity = capacity;
    this.timeS = new Float64Array(2 * capacity);
    this.columns = Array.from({ length: columnCount }, () => new Float64Array(2 * capacity));
  }

  /** Samples held. */
  get count(): number {
    return Math.min(this.#written, this.capacity);
  }

  /** One past the newest sample. */
  get end(): number {
    return this.#written === 0 ? this.capacity : ((this.#written - 1) % this.capacity) + this.capacity + 1;
  }

  /** Adds a sample: `first` fills the first columns, `rest` those behind. @param timeS later than the newest */
  push(timeS: number, first: Float64Array, rest: Float64Array): void {
    const at = this.#written % this.capacity;
    const { columns, capacity } = this;
    this.timeS[at] = timeS;
    this.timeS[at + capacity] = timeS;
    for (let i = 0; i < columns.length; i++) {
      const value = i < first.length ? first[i] : rest[i - first.length];
      columns[i][at] = value;
      columns[i][at + capacity] = value;
    }
    this.#written++;
  }

  /** Index of the first sample of the past at or after `timeS`; `end` when there is none. */
  indexAt(timeS: number): number {
    let low = this.end - this.count;
    let high = this.end;
    while (low < high) {
      const middle = (low + high) >> 1;
      if (this.timeS[middle] < timeS) low = middle + 1;
      else high = middle;
    }
    return low;
  }

  /** Whether there is a hole behind sample `start`. */
  hasHole(start: number): boolean {
    for (let i = start + 1; i < this.end; i++) if (this.timeS[i] - this.timeS[i - 1] > HOLE_S) return true;
    return false;
  }

  /**
   * A column as it was `lagS` before each sample of [start, end), every `stride`-th: interpolated by the cubic through the
   * four samples around, NaN where the ring holds none, or a hole.
   */
  laggedInto(out: Float64Array, column: number, lagS: number, start: number, end: number, stride = 1): void {
    const { timeS } = this;
    const values = this.columns[column];
    const oldest = this.end - this.count;
    const weights = this.#weights;
    let at = Math.max(oldest, this.indexAt(timeS[start] - lagS) - 1);
    for (let i = start, k = 0; i < end; i += stride, k++) {
      const time = timeS[i] - lagS;
      while (at + 1 < this.end && timeS[at + 1] <= time) at++;
      if (timeS[at] === time) out[k] = values[at];
      else if (at - 1 < oldest || at + 2 >= this.end || timeS[at + 1] - timeS[at] > HOLE_S)
        out[k] = Number.NaN;
      else {
        cubicWeights(weights, time, timeS, at - 1);
        out[k] =
          weights[0] * values[at - 1] +
          weights[1] * values[at] +
          weights[2] * values[at + 1] +
          weights[3] * values[at + 2];
      }
    }
  }
}
