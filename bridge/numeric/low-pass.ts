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

/**
 * Writes what one step of a certain length does to a filter with a certain time constant: step, time constant, and the
 * 2 x 2 matrix, by rows, from deviation from the held input and slope times τ before the step to those after it. Shared by
 * all channels.
 * @param out six slots from `outAt` on
 * @param tauS time constant, s, above zero
 * @param stepS step length, s, above zero
 */
export function lowPassGains(out: Float64Array, outAt: number, tauS: number, stepS: number): void {
  const angle = stepS / tauS;
  const decay = Math.exp(-angle);
  const cosine = decay * Math.cos(angle);
  const sine = decay * Math.sin(angle);
  out[outAt] = stepS;
  out[outAt + 1] = tauS;
  out[outAt + 2] = cosine + sine;
  out[outAt + 3] = sine;
  out[outAt + 4] = -2 * sine;
  out[outAt + 5] = cosine - sine;
}

/**
 * One step of the filter at `at` in the record, to the new input at `inputAt` in the same record (finite).
 * @param channels of both
 * @param gains as from lowPassGains, at `gainsAt`
 */
export function stepLowPass(
  record: Float64Array,
  at: number,
  channels: number,
  inputAt: number,
  gains: Float64Array,
  gainsAt: number,
): void {
  if (record[at]! < gains[gainsAt + 1]!) {
    average(record, at, channels, inputAt, gains[gainsAt]!);
    return;
  }
  const deviationFromDeviation = gains[gainsAt + 2]!;
  const deviationFromSlope = gains[gainsAt + 3]!;
  const slopeFromDeviation = gains[gainsAt + 4]!;
  const slopeFromSlope = gains[gainsAt + 5]!;
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

function average(record: Float64Array, at: number, channels: number, inputAt: number, stepS: number): void {
  record[at]! += stepS;
  const share = stepS / record[at]!;
  for (let i = 0; i < channels; i++) {
    const input = record[inputAt + i]!;
    record[at + 1 + i]! += share * (input - record[at + 1 + i]!);
    record[at + 1 + 2 * channels + i] = input;
  }
}
