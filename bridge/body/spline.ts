/**
 * A cubic spline along the body through the sensors that are left: which slopes it has at them, and what any place on the
 * body takes from its neighbours. Everything that depends on the stations alone is worked out when they change, so that a
 * sweep costs a few products.
 *
 * The slopes make the second derivative continuous (tridiagonal equations, solved by elimination). At either end one
 * condition is free: the slope there plus `endWeight` times the next one is (1 + endWeight) times the mean slope between.
 * 1/2 is the natural spline (no second derivative at the end), 1 a parabola between the last two.
 *
 * Beyond the first and last sensor the value goes on with its slope there, for no longer than the next gap is wide; then
 * it stays.
 */
import { stationOf } from "./between.ts";

/** End weight of the natural spline. */
export const NATURAL = 0.5;

export interface SplineOptions {
  /** 0 nose, 1 tail tip, ascending. */
  readonly stations: readonly number[];
  /** Evenly spaced from nose to tail tip. */
  readonly placeCount: number;
  readonly endWeight: number;
}

export class Spline {
  /** Sensors that are left. */
  count = 0;
  /** From each of them to the next, as a share of the body. */
  readonly widths: Float64Array;

  // What a place is made of: value + ofStep * (next value - value) + ofSlope * slope + ofNextSlope * next slope.
  /** Which of the sensors left is "value". */
  readonly base: Uint16Array;
  readonly ofStep: Float64Array;
  readonly ofSlope: Float64Array;
  readonly ofNextSlope: Float64Array;

  readonly #stations: readonly number[];
  readonly #endWeight: number;
  /** End weight in use. */
  #freedom = 0;
  /** Equations: weights of the slopes before and behind, and what the elimination made of them. */
  readonly #lower: Float64Array;
  readonly #upper: Float64Array;
  readonly #overPivot: Float64Array;

  constructor({ stations, placeCount, endWeight }: SplineOptions) {
    this.#stations = stations;
    this.#endWeight = endWeight;
    this.widths = new Float64Array(stations.length);
    this.base = new Uint16Array(placeCount);
    this.ofStep = new Float64Array(placeCount);
    this.ofSlope = new Float64Array(placeCount);
    this.ofNextSlope = new Float64Array(placeCount);
    this.#lower = new Float64Array(stations.length);
    this.#upper = new Float64Array(stations.length);
    this.#overPivot = new Float64Array(stations.length);
  }

  /** @param left indices of the sensors left, nose to tail; the first `count` of the array, at least one */
  place(left: Uint16Array, count: number): void {
    this.count = count;
    for (let k = 0; k + 1 < count; k++)
      this.widths[k] = this.#stations[left[k + 1]] - this.#stations[left[k]];
    this.#eliminate();
    let k = 0;
    for (let place = 0; place < this.base.length; place++) {
      const station = stationOf(place, this.base.length);
      while (k + 1 < count && this.#stations[left[k + 1]] <= station) k++;
      this.#weigh(place, k, station - this.#stations[left[k]]);
    }
  }

  /**
   * Writes the slope at each sensor left, per whole body length.
   * @param steps difference from each to the next, `channels` numbers a sensor
   * @param out `channels` numbers a sensor
   */
  slopes(steps: Float64Array, channels: number, out: Float64Array): void {
    const { count, widths } = this;
    const last = count - 1;
    if (last === 0) out.fill(0, 0, channels);
    for (let c = 0; c < channels && last > 0; c++) {
      let before = 0;
      for (let k = 0; k <= last; k++) {
        const behind = k < last ? steps[k * channels + c] / widths[k] : 0;
        const atEnd = k === 0 || k === last;
        const right = atEnd
          ? (1 + this.#freedom) * (before + behind)
          : 3 * (before / widths[k - 1] + behind / widths[k]);
        const eliminated = k === 0 ? 0 : this.#lower[k] * out[(k - 1) * channels + c];
        out[k * channels + c] = (right - eliminated) * this.#overPivot[k];
        before = behind;
      }
      for (let k = last - 1; k >= 0; k--)
        out[k * channels + c] -= this.#upper[k] * this.#overPivot[k] * out[(k + 1) * channels + c];
    }
  }

  #eliminate(): void {
    const { count, widths } = this;
    // Between two sensors alone the line is straight, whatever the ends: with a weight of 1 both would say the same.
    this.#freedom = count === 2 ? 0 : this.#endWeight;
    for (let k = 0; k < count; k++) {
      const first = k === 0;
      const last = k === count - 1;
      const lower = first ? 0 : last ? this.#freedom : 1 / widths[k - 1];
      const upper = last ? 0 : first ? this.#freedom : 1 / widths[k];
      const own = first || last ? 1 : 2 * (lower + upper);
      const pivot = own - (first ? 0 : lower * this.#upper[k - 1] * this.#overPivot[k - 1]);
      this.#lower[k] = lower;
      this.#upper[k] = upper;
      this.#overPivot[k] = 1 / pivot;
    }
  }

  /** @param from distance behind the k-th sensor left, negative before the first */
  #weigh(place: number, k: number, from: number): void {
    const last = k === this.count - 1;
    const width = this.widths[last ? Math.max(0, k - 1) : k];
    const within = !last && from >= 0;
    const share = within ? from / width : 0;
    this.base[place] = k;
    this.ofStep[place] = share * share * (3 - 2 * share);
    this.ofSlope[place] = within ? from * (1 - share) ** 2 : Math.max(-width, Math.min(width, from));
    this.ofNextSlope[place] = within ? from * share * (share - 1) : 0;
  }
}
