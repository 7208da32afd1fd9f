/**
 * What the relative heading needs of every sensor, horizontally and in the earth axes of the present headings: its
 * acceleration, its tangent, and the tangent's derivatives, all through the same low-pass, so that they stay comparable.
 * What is slower than tailbeats is taken off: errors of inclination live there, which are steady in the earth's axes.
 */
import { lowPassGains, lowPassSize, stepLowPass } from "../numeric/low-pass.ts";
import { ACCEL, CHANNELS } from "../sweep.ts";
import { Slot } from "./record.ts";

/** Where things lie in a sensor's record. Pairs: east, north. */
export enum Motion {
  /** Hub time of the newest reading, the step that it closed, and the step that the gains are for. */
  TIME = 0,
  SINCE = TIME + 1,
  STEP = SINCE + 1,
  GAINS = STEP + 1,
  /** Acceleration and tangent as they come; then their low-pass: tangent, and its slope times the time constant. */
  INPUT = GAINS + 6,
  LOW_PASS = INPUT + 4,
  TANGENT = LOW_PASS + 1 + 2,
  TANGENT_SLOPE = TANGENT + 4,
  /** Slow means of acceleration, tangent, and the tangent's second derivative; then these three less their means. */
  SLOW = LOW_PASS + 1 + 3 * 4,
  ACCELERATION = SLOW + 6,
  SWING = ACCELERATION + 2,
  /** 1/s². */
  TANGENT_RATE_OF_RATE = SWING + 2,
  SIZE = TANGENT_RATE_OF_RATE + 2,
}

/** Cut-off 8 Hz: above the beats of bodies this long, below the rattle of mountings. */
export const TAU_S = 0.028;
/** Slower than beats, and well below the time constant of the inclination correction, s. */
export const SLOW_S = 0.7;
/** Readings further apart than this do not follow each other, s. */
const BREAK_S = 0.1;
const SAME_STEP = 0.01;

/**
 * Takes a reading.
 * @param record of the fusion: the sweep's time and the sensor's own interval
 * @param orientations body axes to earth, 4 a sensor
 * @param values as in sweep.ts
 * @returns false where the filters have just started, and their outputs mean nothing yet
 */
export function takeMotion(
  r: Float64Array,
  record: Float64Array,
  orientations: Float64Array,
  values: Float64Array,
  sensor: number,
): boolean {
  const at = 4 * sensor;
  const w = orientations[at]!;
  const x = orientations[at + 1]!;
  const y = orientations[at + 2]!;
  const z = orientations[at + 3]!;
  const force = CHANNELS * sensor + ACCEL;
  const fx = values[force]!;
  const fy = values[force + 1]!;
  const fz = values[force + 2]!;
  const east = 1 - 2 * (y * y + z * z);
  const north = 2 * (x * y + w * z);
  r[Motion.INPUT] = east * fx + 2 * (x * y - w * z) * fy + 2 * (x * z + w * y) * fz;
  r[Motion.INPUT + 1] = north * fx + (1 - 2 * (x * x + z * z)) * fy + 2 * (y * z - w * x) * fz;
  r[Motion.INPUT + 2] = east;
  r[Motion.INPUT + 3] = north;
  const timeS = record[Slot.NOW]!;
  const sinceS = timeS - r[Motion.TIME]!;
  r[Motion.TIME] = timeS;
  r[Motion.SINCE] = sinceS;
  if (sinceS > record[Slot.INTERVAL]! + BREAK_S || r[Motion.LOW_PASS] === 0) {
    r[Motion.SINCE] = record[Slot.INTERVAL]!;
    restart(r);
    return false;
  }
  setStep(r);
  stepLowPass(r, Motion.LOW_PASS, 4, Motion.INPUT, r, Motion.GAINS);
  const share = Math.min(1, sinceS / SLOW_S);
  for (let i = 0; i < 4; i++) {
    const value = r[Motion.LOW_PASS + 1 + i]!;
    const mean = r[Motion.SLOW + i]! + share * (value - r[Motion.SLOW + i]!);
    r[Motion.SLOW + i] = mean;
    r[Motion.ACCELERATION + i] = value - mean;
  }
  for (let i = 0; i < 2; i++) {
    // tau² y'' + 2 tau y' + 2 y = 2 u
    const value =
      (2 / (TAU_S * TAU_S)) *
      (r[Motion.INPUT + 2 + i]! - r[Motion.TANGENT + i]! - r[Motion.TANGENT_SLOPE + i]!);
    const mean = r[Motion.SLOW + 4 + i]! + share * (value - r[Motion.SLOW + 4 + i]!);
    r[Motion.SLOW + 4 + i] = mean;
    r[Motion.TANGENT_RATE_OF_RATE + i] = value - mean;
  }
  return r[Motion.LOW_PASS]! >= TAU_S;
}

function restart(r: Float64Array): void {
  r.fill(0, Motion.LOW_PASS, Motion.LOW_PASS + lowPassSize(4));
  setStep(r);
  stepLowPass(r, Motion.LOW_PASS, 4, Motion.INPUT, r, Motion.GAINS);
  for (let i = 0; i < 4; i++) r[Motion.SLOW + i] = r[Motion.INPUT + i]!;
  r.fill(0, Motion.SLOW + 4, Motion.SLOW + 6);
}

function setStep(r: Float64Array): void {
  const stepS = r[Motion.SINCE]!;
  if (Math.abs(stepS - r[Motion.STEP]!) <= SAME_STEP * stepS) return;
  r[Motion.STEP] = stepS;
  lowPassGains(r, Motion.GAINS, TAU_S, stepS);
}
