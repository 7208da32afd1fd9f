/** Shared by the fusion tests: readings of an ideal sensor at a known orientation, and errors against it. */
import type { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { conjugate, fromRotationVector, multiply, rotate } from "../../bridge/numeric/quaternion.ts";
import { createSweep, HAS_INERTIAL, HAS_MAG, type Sweep } from "../../bridge/sweep.ts";

export const RATE_HZ = 100;
export const GRAVITY = 9.81;
/** A field of mid latitudes, east-north-up, µT: north and down. */
export const EARTH_FIELD = [0, 18, -45];

export type Quaternion = number[];
export type Vector = number[];

/** exp of a rotation vector, as an array. */
export function turned(vector: Vector): Quaternion {
  const q = [0, 0, 0, 0];
  fromRotationVector(q, vector);
  return q;
}

export function product(a: Quaternion, b: Quaternion): Quaternion {
  const q = [0, 0, 0, 0];
  multiply(q, a, b);
  return q;
}

/** Earth coordinates of a vector to body coordinates. */
export function toBody(orientation: Quaternion, v: Vector): Vector {
  const inverse = [0, 0, 0, 0];
  const out = [0, 0, 0];
  conjugate(inverse, orientation);
  rotate(out, inverse, v);
  return out;
}

/** A sweep of one sensor, all parts present. */
export function oneSensor(): Sweep {
  const sweep = createSweep(1);
  sweep.stepS = 1 / RATE_HZ;
  sweep.present[0] = HAS_INERTIAL | HAS_MAG;
  return sweep;
}

/** Fills a row with what an ideal sensor without linear acceleration reads. */
export function fillRow(
  sweep: Sweep,
  sensor: number,
  orientation: Quaternion,
  rate: Vector,
  field = EARTH_FIELD,
): void {
  const row = [...rate, ...toBody(orientation, [0, 0, GRAVITY]), ...toBody(orientation, field)];
  sweep.values.set(row, sensor * 9);
}

/** Steps through `seconds` of rest at an orientation. */
export function rest(
  fusion: ChainFusion,
  sweep: Sweep,
  seconds: number,
  orientation: Quaternion,
  rate = [0, 0, 0],
): void {
  fillRow(sweep, 0, orientation, rate);
  for (let i = 0; i < seconds * RATE_HZ; i++) advance(fusion, sweep);
}

/** One nominal step on. */
export function advance(fusion: ChainFusion, sweep: Sweep): void {
  sweep.timeS += 1 / RATE_HZ;
  fusion.step(sweep);
}

/** Angle between the fused and a true orientation, rad. */
export function totalError(fusion: ChainFusion, truth: Quaternion, sensor = 0): number {
  const [w, x, y, z] = error(fusion, truth, sensor);
  return 2 * Math.atan2(Math.hypot(x!, y!, z!), Math.abs(w!));
}

/** Its part other than about the vertical, rad. */
export function inclinationError(fusion: ChainFusion, truth: Quaternion, sensor = 0): number {
  const [w, x, y, z] = error(fusion, truth, sensor);
  return 2 * Math.atan2(Math.hypot(x!, y!), Math.hypot(w!, z!));
}

/** Its part about the vertical, rad, positive left. */
export function headingError(fusion: ChainFusion, truth: Quaternion, sensor = 0): number {
  const [w, , , z] = error(fusion, truth, sensor);
  return 2 * Math.atan(z! / w!);
}

function error(fusion: ChainFusion, truth: Quaternion, sensor: number): Quaternion {
  const inverse = [0, 0, 0, 0];
  conjugate(inverse, truth);
  return product([...fusion.orientations.subarray(sensor * 4, sensor * 4 + 4)], inverse);
}
