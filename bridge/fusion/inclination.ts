/**
 * Inclination: over a few seconds the mean specific force points up. It is averaged in the strapdown frame, which hardly
 * moves, so the body may turn as it likes meanwhile.
 */
import { stepLowPass } from "../numeric/low-pass.ts";
import { keepUnit, multiply, rotate, toMatrix } from "../numeric/quaternion.ts";
import { Gain } from "./coefficients.ts";
import { Slot } from "./record.ts";

const correction = new Float64Array(4);
/** Below this cosine the measured vertical is taken as straight down, and the correction is a half turn about x. */
const UPSIDE_DOWN = -1 + 1e-12;

/** Averages the newest specific force and turns the level frame so that the average points up. */
export function correctInclination(r: Float64Array, gains: Float64Array): void {
  rotate(r, r, r, Slot.INERTIAL_FORCE, Slot.STRAPDOWN, Slot.FORCE);
  stepLowPass(r, Slot.FORCE_LOW_PASS, 3, Slot.INERTIAL_FORCE, gains, Gain.FORCE);
  rotate(r, r, r, Slot.UP, Slot.INCLINATION, Slot.FORCE_LOW_PASS + 1);
  const length = Math.sqrt(
    r[Slot.UP]! * r[Slot.UP]! + r[Slot.UP + 1]! * r[Slot.UP + 1]! + r[Slot.UP + 2]! * r[Slot.UP + 2]!,
  );
  if (!(length > 0)) {
    // Free fall on average: no direction, so no correction.
    r[Slot.UP] = 0;
    r[Slot.UP + 1] = 0;
    r[Slot.UP + 2] = 1;
    return;
  }
  const scale = 1 / length;
  r[Slot.UP]! *= scale;
  r[Slot.UP + 1]! *= scale;
  r[Slot.UP + 2]! *= scale;
  tiltToVertical(r);
  multiply(r, correction, r, Slot.INCLINATION, 0, Slot.INCLINATION);
  keepUnit(r, r, Slot.INCLINATION, Slot.INCLINATION);
}

/** Body axes -> level frame, from its two parts. */
export function composeLevel(r: Float64Array): void {
  multiply(r, r, r, Slot.LEVEL, Slot.INCLINATION, Slot.STRAPDOWN);
  toMatrix(r, r, Slot.LEVEL_MATRIX, Slot.LEVEL);
}

/** correction = the shortest rotation that carries the unit vector `up` to the z axis. */
function tiltToVertical(r: Float64Array): void {
  if (r[Slot.UP + 2]! < UPSIDE_DOWN) {
    correction[0] = 0;
    correction[1] = 1;
    correction[2] = 0;
  } else {
    const w = Math.sqrt(0.5 * (1 + r[Slot.UP + 2]!));
    const scale = 0.5 / w;
    correction[0] = w;
    correction[1] = scale * r[Slot.UP + 1]!;
    correction[2] = -scale * r[Slot.UP]!;
  }
  correction[3] = 0;
}
