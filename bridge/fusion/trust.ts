/** What an orientation is worth, and why: the worst reason that holds. */
import { TRUST } from "../sweep.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";
import { isHeadingSettled, isLevel } from "./uncertainty.ts";

/**
 * The sensor's TRUST code.
 * @param heading what its heading is worth: GOOD, SETTLING or HEADING_UNAIDED
 * @param bridged the orientation is predicted across a lost reading
 */
export function trustOf(
  r: Float64Array,
  heading: number,
  bridged: boolean,
  parameters: FusionParameters,
): number {
  if (r[Slot.STARTED] === 0) return TRUST.LOST;
  if (r[Slot.CLIPPED] === 1) return TRUST.CLIPPED;
  if (bridged) return TRUST.BRIDGED;
  if (heading === TRUST.HEADING_UNAIDED) return TRUST.HEADING_UNAIDED;
  if (!isLevel(r, parameters)) return TRUST.SETTLING;
  return heading;
}

/** What a heading held by the magnetometer is worth. */
export function magneticTrust(r: Float64Array, parameters: FusionParameters): number {
  if (isHeadingUnaided(r, parameters)) return TRUST.HEADING_UNAIDED;
  return isHeadingSettled(r, parameters) ? TRUST.GOOD : TRUST.SETTLING;
}

/** Before there is a reference the field cannot be called disturbed: then the heading is settling, not unaided. */
function isHeadingUnaided(r: Float64Array, parameters: FusionParameters): boolean {
  if (r[Slot.FIELD_SEEN] === 0 || r[Slot.NOW]! - r[Slot.FIELD_TIME]! > parameters.magMissingAfterS)
    return true;
  return r[Slot.FIELD_FLAGGED] === 1 || (r[Slot.REFERENCE_KNOWN] === 1 && r[Slot.DISTURBED] === 1);
}
