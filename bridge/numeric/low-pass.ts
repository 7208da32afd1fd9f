/**
 * Second-order Butterworth low-pass for readings that come at true, uneven times.
 *
 * With the time constant τ the cut-off is √2 / (2π τ) Hz, which puts the two poles at (-1 ± i) / τ; the filter is solved
 * exactly over each step for an input held at the mean of the readings on both sides (the trapezoidal rule). So a step
 * may have any length: a lost sample is a longer step, along the straight line between its neighbours.
 *
 * For the first τ seconds the value is the time-weighted mean of what has come so far, so that a start is quick and
 * smooth; then the filter runs on from that mean.
 *
 * A filter of n channels lives in the caller's flat record, lowPassSize(n) slots from some place on:
 *
 *     0                seconds filtered so far; 0 = not started
 *     1 .. n           value, by channel
 *     n+1 .. 2n        slope of the value, times τ
 *     2n+1 .. 3n       the input before
 */

/** Slots of a filter of so many channels. All zeros is a filter not started. */
export function lowPassSize(channels: number): number {
  return 1 + 3 * channels;
}

/** What one step of a certain length does to a filter with a certain time constant; shared by all its channels. */
export class LowPassGains {
  readonly stepS: number;
  readonly tauS: number;
  /** Deviation from the held input, and slope times τ, after the step from those before it: a 2 x 2 matrix. */
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

/**
 * One step of the filter at `at` in the record, to the new input at `inputAt` in the same record (finite).
 * @param channels of both
 */
export function stepLowPass(
  record: Float64Array,
  at: number,
  channels: number,
  inputAt: number,
  gains: LowPassGains,
): void {
  if (record[at]! < gains.tauS) {
    average(record, at, channels, inputAt, gains);
    return;
  }
  const { deviationFromDeviation, deviationFromSlope, slopeFromDeviation, slopeFromSlope } = gains;
  for (let i = 0; i < channels; i++) {
    const valueAt = at + 1 + i;
    const slopeAt = valueAt + channels;
    const beforeAt = slopeAt + channels;
    const input = record[inputAt + i]!;
    const held = 0.5 * (record[beforeAt]! + input);
    const deviation = record[valueAt]! - held;
    const slope = record[slopeAt]!;
    record[valueAt] = held + deviationFromDeviation * deviation + deviationFromSlope * slope;
    record[slopeAt] = slopeFromDeviation * deviation + slopeFromSlope * slope;
    record[beforeAt] = input;
  }
}

function average(
  record: Float64Array,
  at: number,
  channels: number,
  inputAt: number,
  gains: LowPassGains,
): void {
  record[at]! += gains.stepS;
  const share = gains.stepS / record[at]!;
  for (let i = 0; i < channels; i++) {
    const input = record[inputAt + i]!;
    record[at + 1 + i]! += share * (input - record[at + 1 + i]!);
    record[at + 1 + 2 * channels + i] = input;
  }
}
