/** What of a sweep's row can be used: parts that arrived, are finite, and are not the all-zero row of an unread chip. */
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import type { SensorState } from "./sensor-state.ts";

/**
 * Copies the usable parts of a sensor's row into its state.
 * @returns their presence bits. A clipped magnetometer reading is not usable; angular rate and specific force are, since
 *   a clipped value is still nearer the truth than none.
 */
export function takeReading(state: SensorState, sweep: Sweep, sensor: number): number {
  const { values } = sweep;
  const row = sensor * CHANNELS;
  const present = sweep.present[sensor]!;
  const conditions = sweep.conditions[sensor]!;
  let usable = 0;
  if (present & HAS_GYRO && allFinite(values, row + GYRO)) usable |= HAS_GYRO;
  if (present & HAS_ACCEL && allFinite(values, row + ACCEL) && anyNonZero(values, row + ACCEL))
    usable |= HAS_ACCEL;
  if (present & HAS_MAG && !(conditions & CONDITION.MAG_CLIPPED)) {
    if (allFinite(values, row + MAG) && anyNonZero(values, row + MAG)) usable |= HAS_MAG;
  }
  if (usable & HAS_GYRO) copy(state.rate, values, row + GYRO);
  if (usable & HAS_ACCEL) copy(state.accel, values, row + ACCEL);
  if (usable & HAS_MAG) copy(state.mag, values, row + MAG);
  return usable;
}

function copy(out: Float64Array, from: Float64Array, at: number): void {
  out[0] = from[at]!;
  out[1] = from[at + 1]!;
  out[2] = from[at + 2]!;
}

/** A difference with itself is zero for finite numbers only. */
function allFinite(v: Float64Array, at: number): boolean {
  return v[at]! - v[at]! + (v[at + 1]! - v[at + 1]!) + (v[at + 2]! - v[at + 2]!) === 0;
}

function anyNonZero(v: Float64Array, at: number): boolean {
  return v[at] !== 0 || v[at + 1] !== 0 || v[at + 2] !== 0;
}
