/**
 * Inclination: over a few seconds the mean specific force points up. It is averaged in the strapdown frame, which hardly
 * moves, so the body may turn as it likes meanwhile.
 */
import { stepLowPass } from "../numeric/low-pass.ts";
import { multiply, normalise, rotate, toMatrix } from "../numeric/quaternion.ts";
import { Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** Below this, 1 + cosine: the measured vertical is taken as straight down, and the correction is a half turn about x. */
const UPSIDE_DOWN = 1e-12;

/**
 * Averages the newest specific force.
 * @returns whether a correction is due: once a span of the bias's estimation, whose measure it is, or with each reading
 *   while the average is young. Against its time constant nothing is lost in between, and much of the work is saved.
 */
export function averageForce(r: Float64Array, gains: Float64Array, parameters: FusionParameters): boolean {
  rotate(r, r, r, Slot.INERTIAL_FORCE, Slot.STRAPDOWN, Slot.FORCE);
  stepLowPass(r, Slot.FORCE_LOW_PASS, 3, Slot.INERTIAL_FORCE, gains, Gain.FORCE);
  const spanS = r[Slot.SPAN]! + r[Slot.FORCE_STEP]!;
  return spanS >= parameters.biasSpanS || r[Slot.FORCE_LOW_PASS]! < parameters.accelTauS;
}

/** Turns the level frame so that the average of the specific force points up. */
export function correctInclination(r: Float64Array): void {
  rotate(r, r, r, Slot.UP, Slot.INCLINATION, Slot.FORCE_LOW_PASS + 1);
  const x = r[Slot.UP]!;
  const y = r[Slot.UP + 1]!;
  const z = r[Slot.UP + 2]!;
  const length = Math.sqrt(x * x + y * y + z * z);
  if (!(length > 0)) {
    // Free fall on average: no direction, so no correction.
    r[Slot.UP + 2] = 1;
    return;
  }
  const scale = 1 / length;
  r[Slot.UP] = scale * x;
  r[Slot.UP + 1] = scale * y;
  r[Slot.UP + 2] = scale * z;
  r[Slot.SPAN_TILT]! -= r[Slot.UP + 1]!;
  r[Slot.SPAN_TILT + 1]! += r[Slot.UP]!;
  // The shortest rotation that carries (x, y, z) to the z axis, up to its length.
  const upsideDown = length + z < UPSIDE_DOWN * length;
  r[Slot.ROTATION] = upsideDown ? 0 : length + z;
  r[Slot.ROTATION + 1] = upsideDown ? 1 : y;
  r[Slot.ROTATION + 2] = upsideDown ? 0 : -x;
  r[Slot.ROTATION + 3] = 0;
  multiply(r, r, r, Slot.INCLINATION, Slot.ROTATION, Slot.INCLINATION);
  normalise(r, r, Slot.INCLINATION, Slot.INCLINATION);
}

/** Body axes -> level frame, from its two parts. */
export function composeLevel(r: Float64Array): void {
  multiply(r, r, r, Slot.LEVEL, Slot.INCLINATION, Slot.STRAPDOWN);
  toMatrix(r, r, Slot.LEVEL_MATRIX, Slot.LEVEL);
}
