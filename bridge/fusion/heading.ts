/** Heading: one angle about the vertical, drawn towards magnetic north by the horizontal field in the level frame. */
import { Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";
import { isHeadingSettled, narrowHeading, uncertainShare } from "./uncertainty.ts";

/** A specific force averaged for less than this hardly tells where up is on a moving body, s: a beat of most swimmers. */
const LEVELLED_S = 1;
/** Below this horizontal length the nose axis has no heading. */
const VERTICAL = 1e-3;
/** A horizontal field whose square is below this share of the vertical's is rounding, and points anywhere. */
const VERTICAL_FIELD = 1e-18;

/** Yaw of the nose axis, rad, left of east; the start's where the nose looks straight up or down. */
export function noseYaw(r: Float64Array): number {
  const east = r[Slot.LEVEL_MATRIX]!;
  const north = r[Slot.LEVEL_MATRIX + 3]!;
  if (Math.hypot(east, north) < VERTICAL) return r[Slot.START_YAW]!;
  return Math.atan2(north, east) + 2 * Math.atan2(r[Slot.HEADING + 1]!, r[Slot.HEADING]!);
}

/** Yaw of the nose axis of an orientation (4 slots, body axes to earth), rad, left of east. */
export function yawOf(q: Float64Array, at: number): number {
  const w = q[at]!;
  const x = q[at + 1]!;
  const y = q[at + 2]!;
  const z = q[at + 3]!;
  return Math.atan2(2 * (x * y + w * z), 1 - 2 * (y * y + z * z));
}

/** Without a field: turns the nose axis to the start's yaw, at first east (0), so that a straight chain starts straight. */
export function startHeading(r: Float64Array): void {
  const half = 0.5 * (r[Slot.START_YAW]! - noseYaw(r));
  r[Slot.HEADING] = Math.cos(half);
  r[Slot.HEADING + 1] = Math.sin(half);
}

/** The newest field in the level frame. */
export function levelField(r: Float64Array): void {
  const x = r[Slot.FIELD]!;
  const y = r[Slot.FIELD + 1]!;
  const z = r[Slot.FIELD + 2]!;
  for (let i = 0; i < 3; i++) {
    const row = Slot.LEVEL_MATRIX + 3 * i;
    r[Slot.LEVEL_FIELD + i] = r[row]! * x + r[row + 1]! * y + r[row + 2]! * z;
  }
}

/**
 * Adds the newest field to the span's. Against the times in which a field is judged and heading corrected nothing is lost
 * by doing so once a span of readings.
 * @returns whether that is due: after a span, or with each reading while the heading is uncertain. The level field is then
 *   the mean of the span, and the field's step its length.
 */
export function sumField(r: Float64Array, parameters: FusionParameters): boolean {
  r[Slot.FIELD_SUM]! += r[Slot.LEVEL_FIELD]!;
  r[Slot.FIELD_SUM + 1]! += r[Slot.LEVEL_FIELD + 1]!;
  r[Slot.FIELD_SUM + 2]! += r[Slot.LEVEL_FIELD + 2]!;
  r[Slot.FIELD_COUNT]! += 1;
  r[Slot.FIELD_SPAN]! += r[Slot.FIELD_STEP]!;
  if (r[Slot.FIELD_SPAN]! < parameters.fieldSpanS && isHeadingSettled(r, parameters)) return false;
  const scale = 1 / r[Slot.FIELD_COUNT]!;
  for (let i = 0; i < 3; i++) r[Slot.LEVEL_FIELD + i] = scale * r[Slot.FIELD_SUM + i]!;
  r[Slot.FIELD_STEP] = r[Slot.FIELD_SPAN]!;
  for (let i: number = Slot.FIELD_SUM; i <= Slot.FIELD_SPAN; i++) r[i] = 0;
  return true;
}

/** Turns the heading by a share of its disagreement with the field. A vertical field turns nothing. */
export function correctHeading(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  const x = r[Slot.LEVEL_FIELD]!;
  const y = r[Slot.LEVEL_FIELD + 1]!;
  const z = r[Slot.LEVEL_FIELD + 2]!;
  if (x * x + y * y <= VERTICAL_FIELD * z * z) return;
  chooseGain(r, gains, parameters);
  const gain = r[Slot.HEADING_GAIN]!;
  if (gain === 0) return;
  const c = r[Slot.HEADING]!;
  const s = r[Slot.HEADING + 1]!;
  const cosine = c * c - s * s;
  const sine = 2 * c * s;
  const east = cosine * x - sine * y;
  const north = sine * x + cosine * y;
  // From north to the field, positive to the east: near north by its series, whose next term is below 1e-13 rad.
  let angle: number;
  if (Math.abs(east) < 0.1 * north) {
    const t = east / north;
    const q = t * t;
    angle = t * (1 - q * (1 / 3 - q * (1 / 5 - q * (1 / 7 - q * (1 / 9 - q * (1 / 11))))));
  } else {
    angle = Math.atan2(east, north);
  }
  r[Slot.TURN + 2] = gain * angle;
  turnHeading(r);
}

/** Turns the heading by the angle that lies in the scratch, its part about the vertical: rad, positive left. */
export function turnHeading(r: Float64Array): void {
  const c = r[Slot.HEADING]!;
  const s = r[Slot.HEADING + 1]!;
  // A turn by the half angle, as its tangent (the next term of a small one's series is below 1e-15); back to unit length.
  const half = 0.5 * r[Slot.TURN + 2]!;
  const tangent = Math.abs(half) < 1e-3 ? half * (1 + (half * half) / 3) : Math.tan(half);
  const scale = 1 / Math.sqrt((1 + tangent * tangent) * (c * c + s * s));
  r[Slot.HEADING] = (c - s * tangent) * scale;
  r[Slot.HEADING + 1] = (s + c * tangent) * scale;
}

/** The present heading stands as the mean of all field readings so far: the next ones correct it at the steady gain. */
export function keepHeading(r: Float64Array): void {
  if (r[Slot.STARTED] === 0) return;
  r[Slot.HEADING_VARIANCE] = 0;
}

/** out (4 slots) = heading · level: body axes -> earth. */
export function composeEarth(r: Float64Array, out: Float64Array, outAt: number): void {
  const c = r[Slot.HEADING]!;
  const s = r[Slot.HEADING + 1]!;
  const w = r[Slot.LEVEL]!;
  const x = r[Slot.LEVEL + 1]!;
  const y = r[Slot.LEVEL + 2]!;
  const z = r[Slot.LEVEL + 3]!;
  out[outAt] = c * w - s * z;
  out[outAt + 1] = c * x - s * y;
  out[outAt + 2] = c * y + s * x;
  out[outAt + 3] = c * z + s * w;
}

/**
 * The share of a newest reading in an average to which each counts by the cube of its number, from its share in a plain
 * one (1/n becomes 4/(n + 3)): the earlier after a start in motion the field was levelled, the less it tells.
 */
function latelyWeighted(share: number): number {
  return (4 * share) / (1 + 3 * share);
}

/**
 * The share to correct by. A disturbed field counts for nothing until the allowance for rejection is used up, then for
 * less. An undisturbed one, and any before there is a reference, counts the more the less certain the heading is.
 */
function chooseGain(r: Float64Array, gains: Float64Array, parameters: FusionParameters): void {
  const { magRejectionFactor, magMaxRejectionS } = parameters;
  const stepS = r[Slot.FIELD_STEP]!;
  const believed = r[Slot.DISTURBED] === 0 || (r[Slot.REFERENCE_KNOWN] === 0 && r[Slot.FIELD_FLAGGED] === 0);
  let share = gains[Gain.HEADING]!;
  if (r[Slot.DISTURBED] === 0) {
    r[Slot.REJECTED_TIME] = Math.max(0, r[Slot.REJECTED_TIME]! - magRejectionFactor * stepS);
  } else if (r[Slot.REJECTED_TIME]! > magMaxRejectionS) {
    share /= magRejectionFactor;
  } else {
    r[Slot.REJECTED_TIME]! += stepS;
    share = 0;
  }
  const uncertain = believed ? uncertainShare(r, gains) : 0;
  const levelledFor = r[Slot.FORCE_LOW_PASS]!;
  const taken = levelledFor < LEVELLED_S ? latelyWeighted(uncertain) : uncertain;
  narrowHeading(r, Math.max(share, uncertain));
  r[Slot.HEADING_GAIN] = Math.max(share, taken);
}
