/**
 * Inclination: over a few seconds the mean specific force points up. It is averaged in the strapdown frame, which hardly
 * moves, so the body may turn as it likes meanwhile.
 */
import { keepUnit, multiply, rotate, toMatrix } from "../numeric/quaternion.ts";
import type { StepGains } from "./coefficients.ts";
import type { SensorState } from "./sensor-state.ts";

const correction = new Float64Array(4);
/** Below this cosine the measured vertical is taken as straight down, and the correction is a half turn about x. */
const UPSIDE_DOWN = -1 + 1e-12;

/** Averages the newest specific force and turns the level frame so that the average points up. */
export function correctInclination(state: SensorState, gains: StepGains): void {
  const { inertialAccel, accelLowPass, inclination, up } = state;
  rotate(inertialAccel, state.strapdown, state.accel);
  accelLowPass.step(gains.accel, inertialAccel);
  rotate(up, inclination, accelLowPass.value);
  const length = Math.sqrt(up[0]! * up[0]! + up[1]! * up[1]! + up[2]! * up[2]!);
  if (!(length > 0)) {
    // Free fall on average: no direction, so no correction.
    up[0] = 0;
    up[1] = 0;
    up[2] = 1;
    return;
  }
  for (let i = 0; i < 3; i++) up[i]! /= length;
  tiltTo(up);
  multiply(inclination, correction, inclination);
  keepUnit(inclination, inclination);
}

/** Body axes -> level frame, from its two parts. */
export function composeLevel(state: SensorState): void {
  multiply(state.level, state.inclination, state.strapdown);
  toMatrix(state.levelMatrix, state.level);
}

/** correction = the shortest rotation that carries the unit vector `up` to the z axis. */
function tiltTo(up: Float64Array): void {
  if (up[2]! < UPSIDE_DOWN) {
    correction[0] = 0;
    correction[1] = 1;
    correction[2] = 0;
  } else {
    const w = Math.sqrt(0.5 * (1 + up[2]!));
    correction[0] = w;
    correction[1] = (0.5 * up[1]!) / w;
    correction[2] = (-0.5 * up[0]!) / w;
  }
  correction[3] = 0;
}
