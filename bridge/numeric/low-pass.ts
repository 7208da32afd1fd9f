/**
 * Second-order Butterworth low-pass for readings that come at true, uneven times.
 *
 * With the time constant τ the cut-off is √2 / (2π τ) Hz, which puts the two poles at (-1 ± i) / τ; the filter is solved
 * exactly over each step h for an input held at the mean of the readings on both sides (the trapezoidal rule). So a
 * step may have any length: a lost sample is a longer step, along the straight line between its neighbours.
 *
 * For the first τ seconds the value is the time-weighted mean of what has come so far, so that a start is quick and
 * smooth; then the filter runs on from that mean.
 */

/** What one step of length `stepS` does to a filter with time constant `tauS`; derived once, shared by all channels. */
export class LowPassGains {
  readonly stepS: number;
  readonly tauS: number;
  /** Deviation from the input and scaled slope after the step, from those before it: a 2 x 2 matrix. */
  readonly deviationFromDeviation: number;
  readonly deviationFromSlope: number;
  readonly slopeFromDeviation: number;
  readonly slopeFromSlope: number;

  /** @param tauS time constant, s, above zero; @param stepS step length, s, above zero */
  constructor(tauS: number, stepS: number) {
    this.stepS = stepS;
    this.tauS = tauS;
    const angle = stepS / tauS;
    const decay = Math.exp(-angle);
    const cosine = decay * Math.cos(angle);
    const sine = decay * Math.sin(angle);
    this.deviationFromDeviation = cosine + sine;
    this.deviationFromSlope = sine;
    this.slopeFromDeviation = -2 * sine;
    this.slopeFromSlope = cosine - sine;
  }
}

/** A low-pass of several channels that step together. */
export class LowPass {
  /** The filtered value, by channel. Borrowed: it changes with each step. */
  readonly value: Float64Array;
  /** Seconds filtered so far; 0 = not started. */
  elapsedS = 0;
  /** Slope of the value times τ. */
  readonly #slope: Float64Array;
  readonly #lastInput: Float64Array;

  constructor(channels: number) {
    this.value = new Float64Array(channels);
    this.#slope = new Float64Array(channels);
    this.#lastInput = new Float64Array(channels);
  }

  /** Forgets all input: the next one starts it anew. */
  reset(): void {
    this.value.fill(0);
    this.#slope.fill(0);
    this.#lastInput.fill(0);
    this.elapsedS = 0;
  }

  /** One step to a new input (as many slots as channels, finite). */
  step(gains: LowPassGains, input: Float64Array): void {
    if (this.elapsedS < gains.tauS) this.#average(gains, input);
    else this.#advance(gains, input);
  }

  #average(gains: LowPassGains, input: Float64Array): void {
    this.elapsedS += gains.stepS;
    const share = gains.stepS / this.elapsedS;
    const { value } = this;
    for (let i = 0; i < value.length; i++) value[i]! += share * (input[i]! - value[i]!);
    this.#lastInput.set(input);
  }

  #advance(gains: LowPassGains, input: Float64Array): void {
    const { deviationFromDeviation, deviationFromSlope, slopeFromDeviation, slopeFromSlope } = gains;
    const { value } = this;
    const slopes = this.#slope;
    const lastInput = this.#lastInput;
    for (let i = 0; i < value.length; i++) {
      const held = 0.5 * (lastInput[i]! + input[i]!);
      const deviation = value[i]! - held;
      const slope = slopes[i]!;
      value[i] = held + deviationFromDeviation * deviation + deviationFromSlope * slope;
      slopes[i] = slopeFromDeviation * deviation + slopeFromSlope * slope;
      lastInput[i] = input[i]!;
    }
  }
}
