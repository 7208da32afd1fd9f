/**
 * Overlapping Allan deviation of readings as they come, many rows at once.
 *
 * With x the running sum of the readings, over N readings and averaging over m of them,
 *
 *     variance = sum over k of (x[k + 2m] - 2 x[k + m] + x[k])^2 / (2 m^2 (N - 2m + 1))
 *
 * which is the overlapping estimator of W. J. Riley, "Handbook of Frequency Stability Analysis", NIST SP 1065 (2008).
 * Every reading adds one term for each m, so nothing but the last 2m sums is kept, and nothing is allocated
 * after construction.
 *
 * For white noise of one-sided density d (units/√Hz) the deviation at an averaging time t is d / √(2t). Where it is
 * least, it is 0.664 of the bias instability (IEEE Std 952-1997, from memory; the figure is √(2 ln 2 / π)).
 */

/** Allan deviation where it is flat, over the bias instability. */
export const FLAT_SHARE = Math.sqrt((2 * Math.LN2) / Math.PI);

export class AllanMeter {
  readonly #factors: readonly number[];
  /** Sums kept of a row, a power of two. */
  readonly #kept: number;
  /** rows x kept, rings. */
  readonly #sums: Float64Array;
  /** Readings of each row, and the first: sums are about it, which keeps them small. */
  readonly #count: Float64Array;
  readonly #origin: Float64Array;
  /** rows x factors: sum of squared second differences. */
  readonly #squares: Float64Array;

  /** @param factors how many readings are averaged, increasing, each at least 1 */
  constructor(rows: number, factors: readonly number[]) {
    this.#factors = factors;
    this.#kept = 2 ** Math.ceil(Math.log2(2 * factors[factors.length - 1]! + 1));
    this.#sums = new Float64Array(rows * this.#kept);
    this.#count = new Float64Array(rows);
    this.#origin = new Float64Array(rows);
    this.#squares = new Float64Array(rows * factors.length);
  }

  /** The row's next reading. */
  add(row: number, value: number): void {
    const start = row * this.#kept;
    const mask = this.#kept - 1;
    const before = this.#count[row]!;
    if (before === 0) {
      this.#origin[row] = value;
      this.#sums[start] = 0;
    }
    const now = before + 1;
    const sum = this.#sums[start + (before & mask)]! + value - this.#origin[row]!;
    this.#sums[start + (now & mask)] = sum;
    this.#count[row] = now;
    for (let f = 0; f < this.#factors.length; f++) {
      const m = this.#factors[f]!;
      if (now < 2 * m) break;
      const second =
        sum - 2 * this.#sums[start + ((now - m) & mask)]! + this.#sums[start + ((now - 2 * m) & mask)]!;
      this.#squares[row * this.#factors.length + f]! += second * second;
    }
  }

  /** The row starts anew. */
  reset(row: number): void {
    this.#count[row] = 0;
    this.#squares.fill(0, row * this.#factors.length, (row + 1) * this.#factors.length);
  }

  /** In the unit of the readings, for factor number `f`; NaN before there are two averages. */
  deviation(row: number, f: number): number {
    const m = this.#factors[f]!;
    const terms = this.#count[row]! - 2 * m + 1;
    if (terms < 1) return Number.NaN;
    return Math.sqrt(this.#squares[row * this.#factors.length + f]! / (2 * m * m * terms));
  }
}
