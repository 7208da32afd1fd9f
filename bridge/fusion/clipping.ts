/**
 * Clipped angular rates, made good. While an axis of the gyroscope is at the end of its range it still says the sign and
 * the least size of the rate; what is missing is the angle by which the body turned beyond it, the *excess*. Its estimate
 * weighs what is known of it, each by its uncertainty (clip-excess.ts):
 *
 *     the shoulders      the arc through the readings before and after (clip-shoulders.ts)
 *     earlier beats      what the same axis turned in the same sense, where the motion is periodic (clip-beat.ts)
 *     the field          the turn about the axis that carries the field now to the field before the stretch
 *     the specific force the same with gravity's, which the body's own acceleration makes uncertain
 *
 * All readings of the stretch are kept, and integrated again from its start whenever the estimate changes, so that the
 * excess is turned where it belongs, about an axis that other axes meanwhile turn. A few readings after the return the
 * stretch is closed, and the variance that is left widens the corrections of heading and inclination (uncertainty.ts).
 *
 * Where one axis joins another at its limit, or leaves it, one stretch ends and the next begins. Ours, no source.
 */
import { conjugate, rotate, turnBy } from "../numeric/quaternion.ts";
import { STANDARD_GRAVITY } from "../numeric/units.ts";
import { CHANNELS, CONDITION, type Sweep } from "../sweep.ts";
import { beatPeriod, rememberBeat } from "./clip-beat.ts";
import { estimateExcess, READINGS_AFTER } from "./clip-excess.ts";
import { along, arc, shoulderArc } from "./clip-shoulders.ts";
import { storeRate } from "./gap.ts";
import type { FusionParameters } from "./parameters.ts";
import { CLIP_READINGS, Slot } from "./record.ts";
import { leaveUncertain, openInclination } from "./uncertainty.ts";

/** At or above this share of the range, or of the greatest axis of a flagged reading, an axis is clipped. */
const AT_LIMIT = 0.999;
/** A stretch's reading: rate (3) and step. */
const STRIDE = 4;
/** The sensor's axes, as bits of CLIPPED_AXES. */
const AXES = [0, 1, 2] as const;

/**
 * Which axes of the sensor are at the end of their range.
 * @returns bits 1, 2, 4 for the sensor's x, y, z. A flagged reading without an axis at full scale is flat-topped below
 *   it: then its greatest axis is meant.
 */
export function clippedAxes(r: Float64Array, sweep: Sweep, sensor: number): number {
  const range = AT_LIMIT * r[Slot.GYRO_RANGE]!;
  const flagged = (sweep.conditions[sensor]! & CONDITION.GYRO_CLIPPED) !== 0;
  if (!flagged && range === Infinity) return 0;
  const row = sensor * CHANNELS;
  const x = Math.abs(sweep.raw[row]!);
  const y = Math.abs(sweep.raw[row + 1]!);
  const z = Math.abs(sweep.raw[row + 2]!);
  const greatest = Math.max(x, y, z);
  const limit = flagged ? Math.min(range, AT_LIMIT * greatest) : range;
  if (!(greatest >= limit && limit > 0)) return 0;
  return (x >= limit ? 1 : 0) | (y >= limit ? 2 : 0) | (z >= limit ? 4 : 0);
}

/**
 * Takes the newest angular rate while a stretch is open or begins; call before the rate itself is taken. The strapdown
 * quaternion follows with settleStretch.
 */
export function addToStretch(r: Float64Array, parameters: FusionParameters): void {
  const axes = r[Slot.CLIPPED_AXES]!;
  const another = axes !== 0 && (axes !== r[Slot.CLIP_AXES] || r[Slot.CLIP_AFTER]! > 0);
  const count = r[Slot.CLIP_COUNT]!;
  // Axes at their limit in the reading before.
  const joined = count > 0 && r[Slot.CLIP_AFTER] === 0 ? axes & r[Slot.CLIP_AXES]! : 0;
  if (count > 0 && (another || count === CLIP_READINGS)) closeStretch(r, parameters);
  if (r[Slot.CLIP_COUNT] === 0) openStretch(r, axes, joined);
  const at = Slot.CLIP_RATES + STRIDE * r[Slot.CLIP_COUNT]!;
  storeRate(r, at);
  r[at + 3] = r[Slot.RATE_STEP]!;
  r[Slot.CLIP_COUNT]! += 1;
  if (axes === 0) r[Slot.CLIP_AFTER]! += 1;
  else r[Slot.CLIP_SPAN]! += r[Slot.RATE_STEP]!;
}

/**
 * After each reading of the stretch: estimates the excess anew, and turns the strapdown quaternion through the whole
 * stretch with it.
 * @param fresh presence bits of the field and specific force that came with it and may be compared with those before
 */
export function settleStretch(r: Float64Array, fresh: number, parameters: FusionParameters): void {
  for (const axis of AXES) {
    if ((r[Slot.CLIP_AXES]! & (1 << axis)) === 0) continue;
    integrateStretch(r, axis);
    estimateExcess(r, axis, fresh, parameters);
  }
  integrateStretch(r, 0);
  if (r[Slot.CLIP_AFTER] === READINGS_AFTER) closeStretch(r, parameters);
}

/** What the stretch left uncertain opens the corrections; what it turned is remembered if it was whole. */
function closeStretch(r: Float64Array, parameters: FusionParameters): void {
  for (const axis of AXES) {
    if ((r[Slot.CLIP_AXES]! & (1 << axis)) === 0) continue;
    leaveUncertain(r, axis, beatPeriod(r, axis, Math.sign(along(r, axis, Slot.CLIP_RATES))) > 0);
    if (r[Slot.CLIP_AFTER]! > 0 && (r[Slot.CLIP_JOINED]! & (1 << axis)) === 0) remember(r, axis);
  }
  openInclination(r, parameters);
  r[Slot.CLIP_COUNT] = 0;
}

function remember(r: Float64Array, axis: number): void {
  const rate = along(r, axis, Slot.CLIP_RATES);
  const sign = Math.sign(rate);
  shoulderArc(r, axis, sign, Math.abs(rate), beatPeriod(r, axis, sign));
  const weight = r[Slot.CLIP_OWN_WEIGHT + axis]!;
  const excess = Math.max(0, (sign * r[Slot.CLIP_OWN_SUM + axis]!) / weight);
  rememberBeat(r, axis, sign, arc[1]!, excess, 1 / weight);
}

function openStretch(r: Float64Array, axes: number, joined: number): void {
  r.fill(0, Slot.CLIP_AXES, Slot.CLIP_RATES);
  r[Slot.CLIP_AXES] = axes;
  r[Slot.CLIP_JOINED] = joined;
  for (let i = 0; i < 4; i++) r[Slot.BEFORE_CLIP + i] = r[Slot.STRAPDOWN + i]!;
  for (let i = 0; i < 4; i++) r[Slot.CLIP_LAST + i] = r[Slot.TRUE_RATE + i]!;
  for (let i = 0; i < 4; i++) r[Slot.CLIP_LAST_BUT_ONE + i] = r[Slot.RATE_BEFORE + i]!;
  r[Slot.CLIP_KNOWN] = r[Slot.RATES_KNOWN]!;
  conjugate(r, r, Slot.ROTATION, Slot.INCLINATION);
  rotate(r, r, r, Slot.CLIP_FIELD, Slot.ROTATION, Slot.STEADY_FIELD);
  r[Slot.CLIP_GRAVITY + 2] = STANDARD_GRAVITY;
  rotate(r, r, r, Slot.CLIP_GRAVITY, Slot.ROTATION, Slot.CLIP_GRAVITY);
}

/**
 * Turns the strapdown quaternion from before the stretch through all its readings. The excess is spread over the clipped
 * ones: on a parabola, or while the axis has not come back, on a straight line.
 * @param lever sensor axis whose lever is summed up on the way: how the strapdown frame turns with its excess
 */
function integrateStretch(r: Float64Array, lever: number): void {
  const clipped = r[Slot.CLIP_COUNT]! - r[Slot.CLIP_AFTER]!;
  const spanS = r[Slot.CLIP_SPAN]!;
  let timeS = 0;
  for (let i = 0; i < 4; i++) r[Slot.STRAPDOWN + i] = r[Slot.BEFORE_CLIP + i]!;
  for (let i = 0; i < 3; i++) r[Slot.CLIP_LEVER + i] = 0;
  for (let reading = 0; reading < r[Slot.CLIP_COUNT]!; reading++) {
    const at = Slot.CLIP_RATES + STRIDE * reading;
    const stepS = r[at + 3]!;
    for (let i = 0; i < 3; i++) r[Slot.TURN + i] = stepS * r[at + i]!;
    if (reading < clipped) {
      const u = (timeS + 0.5 * stepS) / spanS;
      const share = ((r[Slot.CLIP_AFTER] === 0 ? 2 * u : 6 * u * (1 - u)) * stepS) / spanS;
      for (const axis of AXES) {
        const excess = share * r[Slot.CLIP_EXCESS + axis]!;
        for (let i = 0; i < 3; i++) r[Slot.TURN + i]! += excess * r[Slot.GYRO_AXES + 3 * i + axis]!;
      }
      for (let i = 0; i < 3; i++) r[Slot.ROTATION + i] = share * r[Slot.GYRO_AXES + 3 * i + lever]!;
      rotate(r, r, r, Slot.ROTATION, Slot.STRAPDOWN, Slot.ROTATION);
      for (let i = 0; i < 3; i++) r[Slot.CLIP_LEVER + i]! += r[Slot.ROTATION + i]!;
    }
    turnBy(r, r, r, Slot.STRAPDOWN, Slot.STRAPDOWN, Slot.TURN);
    timeS += stepS;
  }
}

/** Keeps the newest mean field, for the next stretch or gap; while one is open, the one before it stays. */
export function keepField(r: Float64Array): void {
  if (r[Slot.CLIP_COUNT] !== 0 || r[Slot.GAP_OPEN] === 1) return;
  for (let i = 0; i < 3; i++) r[Slot.STEADY_FIELD + i] = r[Slot.LEVEL_FIELD + i]!;
  r[Slot.STEADY_KNOWN] = 1;
}
