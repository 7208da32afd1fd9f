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
  /** A sensor's slope, eliminated: weights of the steps before and behind it, and of the slopes before and behind it. */
  readonly #ofStepBefore: Float64Array;
  readonly #ofStepBehind: Float64Array;
  readonly #ofSlopeBefore: Float64Array;
  readonly #ofSlopeBehind: Float64Array;

  constructor({ stations, placeCount, endWeight }: SplineOptions) {
    this.#stations = stations;
    this.#endWeight = endWeight;
    this.widths = new Float64Array(stations.length);
    this.base = new Uint16Array(placeCount);
    this.ofStep = new Float64Array(placeCount);
    this.ofSlope = new Float64Array(placeCount);
    this.ofNextSlope = new Float64Array(placeCount);
    this.#ofStepBefore = new Float64Array(stations.length);
    this.#ofStepBehind = new Float64Array(stations.length);
    this.#ofSlopeBefore = new Float64Array(stations.length);
    this.#ofSlopeBehind = new Float64Array(stations.length);
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
    const ofStepBefore = this.#ofStepBefore;
    const ofStepBehind = this.#ofStepBehind;
    const ofSlopeBefore = this.#ofSlopeBefore;
    const ofSlopeBehind = this.#ofSlopeBehind;
    const last = (this.count - 1) * channels;
    for (let c = 0; c < channels; c++) {
      let before = 0;
      let slope = 0;
      for (let k = 0, at = c; at < last; k++, at += channels) {
        const behind = steps[at];
        slope = ofStepBefore[k] * before + ofStepBehind[k] * behind + ofSlopeBefore[k] * slope;
        out[at] = slope;
        before = behind;
      }
      const end = this.count - 1;
      slope = ofStepBefore[end] * before + ofSlopeBefore[end] * slope;
      out[last + c] = slope;
      for (let k = end - 1, at = last + c - channels; k >= 0; k--, at -= channels) {
        slope = out[at] + ofSlopeBehind[k] * slope;
        out[at] = slope;
      }
    }
  }

  #eliminate(): void {
    const { count, widths } = this;
    // Between two sensors alone the line is straight, whatever the ends: with a weight of 1 both would say the same.
    const freedom = count === 2 ? 0 : this.#endWeight;
    for (let k = 0; k < count; k++) {
      const first = k === 0;
      const last = k === count - 1;
      const overBefore = first ? 0 : 1 / widths[k - 1];
      const overBehind = last ? 0 : 1 / widths[k];
      const atEnd = first || last;
      const lower = last && !first ? freedom : overBefore;
      const upper = first && !last ? freedom : overBehind;
      const own = atEnd ? 1 : 2 * (lower + upper);
      const pivot = own + (first ? 0 : lower * this.#ofSlopeBehind[k - 1]);
      this.#ofStepBefore[k] = ((atEnd ? 1 + freedom : 3 * overBefore) * overBefore) / pivot;
      this.#ofStepBehind[k] = ((atEnd ? 1 + freedom : 3 * overBehind) * overBehind) / pivot;
      this.#ofSlopeBefore[k] = -lower / pivot;
      this.#ofSlopeBehind[k] = -upper / pivot;
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
