/** Heading: one angle about the vertical, drawn towards magnetic north by the horizontal field in the level frame. */
import type { StepGains } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import type { SensorState } from "./sensor-state.ts";

/** Below this horizontal length the nose axis has no heading. */
const VERTICAL = 1e-3;

/** Yaw of the nose axis, rad, left of east; the last start's where the nose looks straight up or down. */
export function noseYaw(state: SensorState): number {
  const east = state.levelMatrix[0]!;
  const north = state.levelMatrix[3]!;
  if (Math.hypot(east, north) < VERTICAL) return state.startYaw;
  return Math.atan2(north, east) + 2 * Math.atan2(state.heading[1]!, state.heading[0]!);
}

/** Without a field: turns the nose axis to where it pointed before, at first east (yaw 0), so a straight chain starts straight. */
export function startHeading(state: SensorState): void {
  const half = 0.5 * (state.startYaw - noseYaw(state));
  state.heading[0] = Math.cos(half);
  state.heading[1] = Math.sin(half);
}

/** levelMag = the newest field in the level frame. */
export function levelField(state: SensorState): void {
  const { levelMatrix: m, levelMag, mag } = state;
  levelMag[0] = m[0]! * mag[0]! + m[1]! * mag[1]! + m[2]! * mag[2]!;
  levelMag[1] = m[3]! * mag[0]! + m[4]! * mag[1]! + m[5]! * mag[2]!;
  levelMag[2] = m[6]! * mag[0]! + m[7]! * mag[1]! + m[8]! * mag[2]!;
}

/** Turns the heading by a share of its disagreement with the field. A field without horizontal part turns nothing. */
export function correctHeading(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const { heading, levelMag } = state;
  const gain = correctionGain(state, gains, parameters);
  if (gain === 0) return;
  const c = heading[0]!;
  const s = heading[1]!;
  const cosine = c * c - s * s;
  const sine = 2 * c * s;
  const east = cosine * levelMag[0]! - sine * levelMag[1]!;
  const north = sine * levelMag[0]! + cosine * levelMag[1]!;
  const half = 0.5 * gain * Math.atan2(east, north);
  const ch = Math.cos(half);
  const sh = Math.sin(half);
  heading[0] = c * ch - s * sh;
  heading[1] = s * ch + c * sh;
  const scale = 1.5 - 0.5 * (heading[0]! ** 2 + heading[1]! ** 2);
  heading[0]! *= scale;
  heading[1]! *= scale;
}

/**
 * The share to correct by: the first readings are averaged (1, 1/2, 1/3 ... until the steady gain is reached); a disturbed
 * field counts for nothing until the allowance for rejection is used up, then for less.
 */
function correctionGain(state: SensorState, gains: StepGains, parameters: FusionParameters): number {
  let gain = gains.heading;
  if (state.disturbed) {
    if (state.rejectionS <= parameters.magMaxRejectionS) {
      state.rejectionS += state.magStepS;
      gain = 0;
    } else {
      gain /= parameters.magRejectionFactor;
    }
  } else {
    state.rejectionS = Math.max(0, state.rejectionS - parameters.magRejectionFactor * state.magStepS);
  }
  if (state.headingAveraged) return gain;
  state.headingReadings++;
  const average = 1 / state.headingReadings;
  if (average < gains.heading) state.headingAveraged = true;
  return Math.max(gain, average);
}
