/**
 * Magnetic reference: norm and dip of the field that is taken for the Earth's. A field that differs is disturbed; a
 * steady other field, met for long enough in motion, becomes the new reference. What the health stage has flagged is
 * disturbed in any case and becomes no reference.
 */
import { stepLowPass } from "../numeric/low-pass.ts";
import { Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

const CURRENT = Slot.FIELD_LOW_PASS + 1;

/**
 * Judges the newest field (in the level frame, not zero) against the reference, and lets the reference follow. The dip is
 * worked out to 1e-5 rad, far within its limit: arc tangent by M. Abramowitz & I. A. Stegun, Handbook of Mathematical
 * Functions, 4.4.47 (from memory; a test holds the bound).
 */
export function watchField(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  const down = -r[Slot.LEVEL_FIELD + 2]!;
  const square = r[Slot.LEVEL_FIELD]! ** 2 + r[Slot.LEVEL_FIELD + 1]! ** 2;
  const level = Math.sqrt(square);
  const steep = Math.abs(down) > level;
  const t = steep ? level / down : down / level;
  const q = t * t;
  const angle = t * (0.999866 + q * (-0.3302995 + q * (0.180141 + q * (-0.085133 + q * 0.0208351))));
  r[Slot.NORM_AND_DIP] = Math.sqrt(square + down * down);
  r[Slot.NORM_AND_DIP + 1] = steep ? Math.sign(down) * 0.5 * Math.PI - angle : angle;
  stepLowPass(r, Slot.FIELD_LOW_PASS, 2, Slot.NORM_AND_DIP, gains, Gain.FIELD);
  compareWithReference(r, gains, parameters);
  considerNewReference(r, gains, parameters);
}

function compareWithReference(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  if (r[Slot.FIELD_FLAGGED] === 1 || !isCurrent(r, Slot.REFERENCE, parameters)) {
    r[Slot.UNDISTURBED_TIME] = 0;
    r[Slot.DISTURBED] = 1;
    return;
  }
  r[Slot.UNDISTURBED_TIME]! += r[Slot.FIELD_STEP]!;
  if (r[Slot.UNDISTURBED_TIME]! < parameters.magMinUndisturbedS) return;
  r[Slot.DISTURBED] = 0;
  follow(r, Slot.REFERENCE, gains);
}

function considerNewReference(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  if (r[Slot.DISTURBED] === 0) {
    // The candidate would be the reference's own field.
    r[Slot.CANDIDATE_TIME] = 0;
    return;
  }
  if (r[Slot.FIELD_FLAGGED] === 1 || !isCurrent(r, Slot.CANDIDATE, parameters)) {
    r[Slot.CANDIDATE_TIME] = 0;
    copyField(r, Slot.CANDIDATE, CURRENT);
    return;
  }
  if (isMoving(r, parameters)) r[Slot.CANDIDATE_TIME]! += r[Slot.FIELD_STEP]!;
  follow(r, Slot.CANDIDATE, gains);
  const neededS = r[Slot.REFERENCE_KNOWN] === 1 ? parameters.magNewS : parameters.magFirstS;
  if (r[Slot.CANDIDATE_TIME]! < neededS) return;
  r[Slot.REFERENCE_KNOWN] = 1;
  copyField(r, Slot.REFERENCE, Slot.CANDIDATE);
  r[Slot.DISTURBED] = 0;
  r[Slot.UNDISTURBED_TIME] = parameters.magMinUndisturbedS;
}

/** Is the current field within the limits of the one at `at`? Never of a norm of zero, which stands for none yet. */
function isCurrent(r: Float64Array, at: number, parameters: FusionParameters): boolean {
  const norm = r[at]!;
  return (
    Math.abs(r[CURRENT]! - norm) < parameters.magNormShare * norm &&
    Math.abs(r[CURRENT + 1]! - r[at + 1]!) < parameters.magDipLimit
  );
}

function isMoving(r: Float64Array, parameters: FusionParameters): boolean {
  const x = r[Slot.REST_LOW_PASS + 1]!;
  const y = r[Slot.REST_LOW_PASS + 2]!;
  const z = r[Slot.REST_LOW_PASS + 3]!;
  return x * x + y * y + z * z >= parameters.magNewMinRate * parameters.magNewMinRate;
}

function follow(r: Float64Array, at: number, gains: Float64Array): void {
  r[at]! += gains[Gain.REFERENCE]! * (r[CURRENT]! - r[at]!);
  r[at + 1]! += gains[Gain.REFERENCE]! * (r[CURRENT + 1]! - r[at + 1]!);
}

function copyField(r: Float64Array, to: number, from: number): void {
  r[to] = r[from]!;
  r[to + 1] = r[from + 1]!;
}
