/** What an orientation is worth, and why: the worst reason that holds. */
import { TRUST } from "../sweep.ts";
import type { FusionParameters } from "./parameters.ts";
import type { SensorState } from "./sensor-state.ts";

/**
 * The sensor's TRUST code.
 * @param magnetic the heading is to be held by the magnetometer
 * @param bridged the orientation is predicted across a lost reading
 */
export function trustOf(
  state: SensorState,
  timeS: number,
  magnetic: boolean,
  bridged: boolean,
  parameters: FusionParameters,
): number {
  if (!state.started) return TRUST.LOST;
  if (!magnetic || isHeadingUnaided(state, timeS, parameters)) return TRUST.HEADING_UNAIDED;
  if (timeS < state.clippedUntilS) return TRUST.CLIPPED;
  if (bridged) return TRUST.BRIDGED;
  if (state.accelLowPass.elapsedS < parameters.accelTauS || !state.headingAveraged) return TRUST.SETTLING;
  return TRUST.GOOD;
}

/** Before there is a reference the field cannot be called disturbed: then the heading is settling, not unaided. */
function isHeadingUnaided(state: SensorState, timeS: number, parameters: FusionParameters): boolean {
  if (!state.magSeen || timeS - state.magTimeS > parameters.magMissingAfterS) return true;
  return state.fieldFlagged || (state.referenceKnown && state.disturbed);
}
