/**
 * Sums and maxima over the last seconds of hub time, many rows at once, in slices: the window ends with the slice that is
 * being filled, so it spans between (slices - 1) / slices of its length and all of it. Nothing is allocated after
 * construction. Rows are written for the time of the last `advance`.
 */

/** Tells how many slices to clear as time passes. */
class SliceClock {
  readonly sliceS: number;
  readonly slices: number;
  /** Slice being filled, 0 .. slices - 1. */
  current = 0;
  #number = Number.NEGATIVE_INFINITY;

  constructor(windowS: number, slices: number) {
    this.sliceS = windowS / slices;
    this.slices = slices;
  }

  /** Slices begun since the last call, at most all. */
  advance(timeS: number): number {
    // A nanosecond keeps the rounding of a time that lies on a border from moving it into the slice before.
    const number = Math.floor((timeS + 1e-9) / this.sliceS);
    if (number <= this.#number) return 0;
    const begun = Math.min(number - this.#number, this.slices);
    this.#number = number;
    return begun;
  }

  step(): void {
    this.current = (this.current + 1) % this.slices;
  }
}

export class RollingSum {
  readonly #rows: number;
  readonly #clock: SliceClock;
  /** slices x rows */
  readonly #sums: Float64Array;
  readonly #total: Float64Array;

  constructor(rows: number, windowS: number, slices: number) {
    this.#rows = rows;
    this.#clock = new SliceClock(windowS, slices);
    this.#sums = new Float64Array(rows * slices);
    this.#total = new Float64Array(rows);
  }

  advance(timeS: number): void {
    const begun = this.#clock.advance(timeS);
    if (begun === 0) return;
    for (let k = 0; k < begun; k++) {
      this.#clock.step();
      this.#sums.fill(0, this.#clock.current * this.#rows, (this.#clock.current + 1) * this.#rows);
    }
    // Added up afresh, so that shares of counts leave no rounding behind.
    this.#total.fill(0);
    for (let at = 0; at < this.#sums.length; at++) this.#total[at % this.#rows]! += this.#sums[at]!;
  }

  /** @param overS the amount is spread evenly over this much time up to now; what falls before the window is left out */
  add(row: number, amount: number, overS = 0): void {
    const { current, slices, sliceS } = this.#clock;
    const parts = Math.max(1, Math.ceil(overS / sliceS));
    const kept = Math.min(parts, slices);
    for (let k = 0; k < kept; k++) {
      const slice = (current - k + slices) % slices;
      this.#sums[slice * this.#rows + row]! += amount / parts;
    }
    this.#total[row]! += (amount / parts) * kept;
  }

  sum(row: number): number {
    return this.#total[row]!;
  }

  /** The sum without the slice being filled: of a window that always has its full length, slices - 1 of them. */
  sumOfFull(row: number): number {
    return this.#total[row]! - this.#sums[this.#clock.current * this.#rows + row]!;
  }
}

export class RollingMax {
  readonly #rows: number;
  readonly #clock: SliceClock;
  /** slices x rows */
  readonly #maxima: Float64Array;
  readonly #top: Float64Array;

  constructor(rows: number, windowS: number, slices: number) {
    this.#rows = rows;
    this.#clock = new SliceClock(windowS, slices);
    this.#maxima = new Float64Array(rows * slices).fill(Number.NEGATIVE_INFINITY);
    this.#top = new Float64Array(rows).fill(Number.NEGATIVE_INFINITY);
  }

  advance(timeS: number): void {
    const begun = this.#clock.advance(timeS);
    if (begun === 0) return;
    for (let k = 0; k < begun; k++) {
      this.#clock.step();
      const start = this.#clock.current * this.#rows;
      this.#maxima.fill(Number.NEGATIVE_INFINITY, start, start + this.#rows);
    }
    this.#top.fill(Number.NEGATIVE_INFINITY);
    for (let at = 0; at < this.#maxima.length; at++) {
      const row = at % this.#rows;
      if (this.#maxima[at]! > this.#top[row]!) this.#top[row] = this.#maxima[at]!;
    }
  }

  put(row: number, value: number): void {
    const at = this.#clock.current * this.#rows + row;
    if (value > this.#maxima[at]!) this.#maxima[at] = value;
    if (value > this.#top[row]!) this.#top[row] = value;
  }

  /** -Infinity when nothing was put in the window. */
  max(row: number): number {
    return this.#top[row]!;
  }
}
