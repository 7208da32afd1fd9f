/**
 * Yaw, pitch and roll of an orientation, for display and export. Order yaw, pitch, roll of ISO 8855 (x forward, y left, z
 * up), with two signs by our own convention, stated here: pitch is nose-up positive, so it is the elevation of the body's
 * x axis (ISO 8855 turns about the left-pointing y, which lowers the nose); roll is right-side-down positive, which in
 * these axes is the right-hand turn about x.
 */
import type { Slots } from "./quaternion.ts";

/** Closer to the vertical than this (sine of the angle), yaw and roll turn about the same axis and cannot be told apart. */
const VERTICAL = 1e-9;

/**
 * Writes yaw, pitch and roll, rad: yaw and roll in -pi..pi, pitch in -pi/2..pi/2. With the nose straight up or down the
 * whole turn about the vertical is given as yaw, and roll is 0.
 * @param q unit quaternion, scalar first, body axes to earth
 */
export function toAngles(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  const w = q[qAt]!;
  const x = q[qAt + 1]!;
  const y = q[qAt + 2]!;
  const z = q[qAt + 3]!;
  const noseEast = 1 - 2 * (y * y + z * z);
  const noseNorth = 2 * (x * y + w * z);
  const noseUp = 2 * (x * z - w * y);
  const level = Math.hypot(noseEast, noseNorth);
  const upright = level > VERTICAL;
  out[outAt] = upright
    ? Math.atan2(noseNorth, noseEast)
    : Math.atan2(2 * (w * z - x * y), 1 - 2 * (x * x + z * z));
  out[outAt + 1] = Math.atan2(noseUp, level);
  out[outAt + 2] = upright ? Math.atan2(2 * (y * z + w * x), 1 - 2 * (x * x + y * y)) : 0;
}
