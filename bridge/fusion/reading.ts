/** What of a sweep's row can be used: parts that arrived, are finite, and are not the all-zero row of an unread chip. */
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import { Slot } from "./record.ts";

/**
 * Copies the usable parts of a sensor's row into its record.
 * @returns their presence bits. A clipped magnetometer reading is not usable; angular rate and specific force are, since
 *   a clipped value is still nearer the truth than none.
 */
export function takeReading(r: Float64Array, sweep: Sweep, sensor: number): number {
  const { values } = sweep;
  const row = sensor * CHANNELS;
  const present = sweep.present[sensor]!;
  const magClipped = (sweep.conditions[sensor]! & CONDITION.MAG_CLIPPED) !== 0;
  let usable = 0;
  if (present & HAS_GYRO && areFinite(values, row + GYRO)) {
    usable |= HAS_GYRO;
    copyVector(r, Slot.RATE, values, row + GYRO);
  }
  if (present & HAS_ACCEL && areFinite(values, row + ACCEL) && isVector(values, row + ACCEL)) {
    usable |= HAS_ACCEL;
    copyVector(r, Slot.FORCE, values, row + ACCEL);
  }
  if (present & HAS_MAG && !magClipped && areFinite(values, row + MAG) && isVector(values, row + MAG)) {
    usable |= HAS_MAG;
    copyVector(r, Slot.FIELD, values, row + MAG);
  }
  return usable;
}

function copyVector(r: Float64Array, to: number, values: Float64Array, from: number): void {
  r[to] = values[from]!;
  r[to + 1] = values[from + 1]!;
  r[to + 2] = values[from + 2]!;
}

/** A difference with itself is zero for finite numbers only. */
function areFinite(v: Float64Array, at: number): boolean {
  return v[at]! - v[at]! + (v[at + 1]! - v[at + 1]!) + (v[at + 2]! - v[at + 2]!) === 0;
}

function isVector(v: Float64Array, at: number): boolean {
  return v[at] !== 0 || v[at + 1] !== 0 || v[at + 2] !== 0;
}
