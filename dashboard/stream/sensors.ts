/** A sensor's numbers and states within a frame (layout in bridge/wire/frame.ts; codes as in the bridge's sweeps). */
import type { DisplayFrame } from "../../bridge/wire/frame.ts";

export const TRUST_WORDS = ["good", "settling", "bridged", "clipped", "heading unaided", "lost"] as const;
export const TRUST_LOST = 5;

export const trustOf = (frame: DisplayFrame, sensor: number): number => frame.sensorStates[2 * sensor]!;
export const gyroHeadroom = (frame: DisplayFrame, sensor: number): number => frame.sensorNumbers[4 * sensor]!;
export const accelHeadroom = (frame: DisplayFrame, sensor: number): number =>
  frame.sensorNumbers[4 * sensor + 1]!;
/** Share by which the magnetic field is off; NaN without magnetometer or reference. */
export const fieldOff = (frame: DisplayFrame, sensor: number): number => frame.sensorNumbers[4 * sensor + 2]!;
export const delivered = (frame: DisplayFrame, sensor: number): number =>
  frame.sensorNumbers[4 * sensor + 3]!;
