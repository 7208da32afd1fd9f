/**
 * A running fit of a mean and the first harmonics of a shared phase to several channels at once:
 *
 *     y(t) = m + a_1 cos p + b_1 sin p + a_2 cos 2p + b_2 sin 2p + ...
 *
 * Adaptive Fourier estimation: the Fourier linear combiner (C. A. Vaz, N. V. Thakor, "Adaptive Fourier estimation of
 * time-varying evoked potentials", IEEE Trans. Biomed. Eng. 36, 1989, 448-455; from memory), its weights found by
 * recursive least squares with exponential forgetting instead of steepest descent, so that an uneven or short stretch of
 * phase is weighed as what it is.
 *
 * All channels share the regressor, so one gain vector a step serves them all. It is solved for anew, by Cholesky (without
 * square roots: L D L'), from the weighted mean of the regressor's outer product, plus a little of the identity. That mean is bounded whatever the
 * phase does, so nothing blows up while it stands still, and no error piles up over hours: a step depends on what is not
 * yet forgotten. The identity's share holds coefficients still of which the data say nothing; it does not pull them.
 */

/** Share of the identity: far below the 1/2 of a harmonic seen over a whole beat, far above what noise may decide. */
const HOLD = 1e-3;

export interface HarmonicFitOptions {
  readonly channels: number;
  /** At least 1. */
  readonly harmonics: number;
}

export class HarmonicFit {
  /** Coefficients of a channel: 1 + 2 * harmonics. */
  readonly size: number;
  /** By channel: mean, then cosine and sine of harmonic 1, 2, ... In the channel's own unit. Borrowed. */
  readonly coefficients: Float64Array;
  /** By channel: mean square of what the fit leaves, then of the whole variation about the mean. Borrowed. */
  readonly residual: Float64Array;
  /** By channel: the fit's value at the newest phase. Borrowed. */
  readonly fitted: Float64Array;
  /** How much of the memory is filled: 0 at the start, towards 1. */
  filled = 0;

  readonly #channels: number;
  readonly #regressor: Float64Array;
  /** Lower triangle by rows: weighted mean of the regressor's outer product, times `filled`; and of that, L D. */
  readonly #product: Float64Array;
  readonly #factor: Float64Array;
  /** One over D. */
  readonly #overPivot: Float64Array;
  readonly #gain: Float64Array;

  constructor({ channels, harmonics }: HarmonicFitOptions) {
    const size = 1 + 2 * harmonics;
    this.size = size;
    this.#channels = channels;
    this.coefficients = new Float64Array(channels * size);
    this.residual = new Float64Array(channels * 2);
    this.fitted = new Float64Array(channels);
    this.#regressor = new Float64Array(size);
    this.#gain = new Float64Array(size);
    this.#product = new Float64Array((size * (size + 1)) / 2);
    this.#factor = new Float64Array((size * (size + 1)) / 2);
    this.#overPivot = new Float64Array(size);
  }

  /** Nothing has been seen. */
  reset(): void {
    this.coefficients.fill(0);
    this.residual.fill(0);
    this.fitted.fill(0);
    this.#product.fill(0);
    this.filled = 0;
  }

  /**
   * Takes one reading of every channel.
   * @param phase rad, any
   * @param share of the newest reading in all that is remembered, above 0, at most 1: 1 - exp(-step / memory)
   * @param values one a channel; NaN where absent: that channel's coefficients stay
   */
  step(phase: number, share: number, values: Float64Array): void {
    const { size, coefficients, residual, fitted } = this;
    const x = this.#regressor;
    const gain = this.#gain;
    setRegressor(x, phase);
    this.#solveGain(share);
    let taken = 0;
    for (let i = 0; i < size; i++) taken += gain[i]! * x[i]!;
    const meanShare = share / this.filled;
    const mean = gain[0]!;
    for (let channel = 0, at = 0; channel < this.#channels; channel++, at += size) {
      let before = coefficients[at]!;
      for (let i = 1; i < size; i += 2)
        before += x[i]! * coefficients[at + i]! + x[i + 1]! * coefficients[at + i + 1]!;
      fitted[channel] = before;
      const value = values[channel]!;
      if (Number.isNaN(value)) continue;
      const error = value - before;
      coefficients[at]! += mean * error;
      for (let i = 1; i < size; i += 2) {
        coefficients[at + i]! += gain[i]! * error;
        coefficients[at + i + 1]! += gain[i + 1]! * error;
      }
      fitted[channel] = before + taken * error;
      // Errors before and after the step, multiplied: the recursion that gives the least sum of squares itself.
      const left = error * error * (1 - taken);
      const apart = value - coefficients[at]!;
      residual[2 * channel]! += meanShare * (left - residual[2 * channel]!);
      residual[2 * channel + 1]! += meanShare * (apart * apart - residual[2 * channel + 1]!);
    }
  }

  /** The fit of one channel at any phase, rad. */
  valueAt(channel: number, phase: number): number {
    const at = channel * this.size;
    let value = this.coefficients[at]!;
    for (let i = 1; i < this.size; i += 2) {
      const angle = 0.5 * (i + 1) * phase;
      value +=
        this.coefficients[at + i]! * Math.cos(angle) + this.coefficients[at + i + 1]! * Math.sin(angle);
    }
    return value;
  }

  /** Derivative of one channel's fit to the phase, at the newest phase, per rad. */
  slope(channel: number): number {
    const at = channel * this.size;
    let slope = 0;
    for (let i = 1; i < this.size; i += 2) {
      const turned =
        this.coefficients[at + i + 1]! * this.#regressor[i]! -
        this.coefficients[at + i]! * this.#regressor[i + 1]!;
      slope += 0.5 * (i + 1) * turned;
    }
    return slope;
  }

  /** Mean square of that derivative over a whole turn of the phase. */
  meanSquareSlope(channel: number): number {
    const at = channel * this.size;
    let sum = 0;
    for (let i = 1; i < this.size; i += 2) {
      const harmonic = 0.5 * (i + 1);
      sum += 0.5 * harmonic ** 2 * (this.coefficients[at + i]! ** 2 + this.coefficients[at + i + 1]! ** 2);
    }
    return sum;
  }

  /** Takes the regressor into its mean product, and leaves in #gain what a unit error does to the coefficients. */
  #solveGain(share: number): void {
    const { size } = this;
    const x = this.#regressor;
    const product = this.#product;
    const factor = this.#factor;
    const gain = this.#gain;
    const overPivot = this.#overPivot;
    this.filled += share * (1 - this.filled);
    const hold = HOLD * this.filled;
    for (let row = 0, at = 0; row < size; row++) {
      const rowAt = at;
      const own = share * x[row]!;
      let sum = own;
      for (let column = 0, columnAt = 0; column < row; column++, at++) {
        let entry = (1 - share) * product[at]! + own * x[column]!;
        product[at] = entry;
        for (let i = 0; i < column; i++) entry -= factor[rowAt + i]! * overPivot[i]! * factor[columnAt + i]!;
        columnAt += column + 1;
        factor[at] = entry;
        sum -= entry * gain[column]!;
      }
      let pivot = (1 - share) * product[at]! + own * x[row]!;
      product[at] = pivot;
      pivot += hold;
      for (let i = 0; i < row; i++) pivot -= factor[rowAt + i]! * factor[rowAt + i]! * overPivot[i]!;
      overPivot[row] = 1 / pivot;
      at++;
      gain[row] = sum * overPivot[row]!;
    }
    for (let row = size - 1; row > 0; row--) {
      const rowAt = (row * (row + 1)) / 2;
      for (let i = 0; i < row; i++) gain[i]! -= factor[rowAt + i]! * overPivot[i]! * gain[row]!;
    }
  }
}

/** 1, cos p, sin p, cos 2p, ...: each harmonic is the one before it turned on by p. */
function setRegressor(x: Float64Array, phase: number): void {
  const cosine = Math.cos(phase);
  const sine = Math.sin(phase);
  x[0] = 1;
  x[1] = cosine;
  x[2] = sine;
  for (let i = 3; i < x.length; i += 2) {
    x[i] = cosine * x[i - 2]! - sine * x[i - 1]!;
    x[i + 1] = sine * x[i - 2]! + cosine * x[i - 1]!;
  }
}
