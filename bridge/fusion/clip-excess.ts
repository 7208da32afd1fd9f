/** How far a clipped axis turned beyond its limit over a stretch of readings: from the shoulders and from the field. */
import { rotate } from "../numeric/quaternion.ts";
import { FIELD_SHARE, type FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** Uncertainty of the shoulders' excess: this share of itself ... Ours, no source. */
const SHOULDER_SHARE = 0.5;
/** ... and this share of the angle turned at the limit. */
const LIMIT_SHARE = 0.02;
/** A field closer than this (sine) to the axis says nothing of turns about it. */
const ALONG_AXIS = 0.1;
/** Time constant with which the slope at the limit fades, s. Ours, no source: a crest of half a beat at five a second. */
const CREST_S = 0.05;
const STRIDE = 4;

const field = new Float64Array(3);
/** What the newest field says: excess (rad), and its weight (1/rad²). */
const seen = new Float64Array(2);

/**
 * Writes the excess (rad, in the sense of the clipped rate) of a sensor axis and its variance. Call with the strapdown
 * quaternion and the axis's lever at the newest reading.
 */
export function estimateExcess(
  r: Float64Array,
  axis: number,
  fresh: boolean,
  parameters: FusionParameters,
): void {
  const sign = Math.sign(along(r, axis, Slot.CLIP_RATES));
  const limit = Math.abs(along(r, axis, Slot.CLIP_RATES));
  const expected = shoulderExcess(r, axis, sign, limit);
  const sigma = SHOULDER_SHARE * expected + LIMIT_SHARE * limit * r[Slot.CLIP_SPAN]!;
  let weight = 1 / (sigma * sigma);
  let sum = weight * sign * expected;
  if (fresh && compareFields(r, axis, parameters) && r[Slot.CLIP_AFTER]! > 0) {
    r[Slot.CLIP_FIELD_WEIGHT + axis]! += seen[1]!;
    r[Slot.CLIP_FIELD_SUM + axis]! += seen[1]! * seen[0]!;
  } else if (fresh && r[Slot.CLIP_AFTER] === 0) {
    weight += seen[1]!;
    sum += seen[1]! * seen[0]!;
  }
  weight += r[Slot.CLIP_FIELD_WEIGHT + axis]!;
  sum += r[Slot.CLIP_FIELD_SUM + axis]!;
  r[Slot.CLIP_EXCESS + axis] = sign * Math.max(0, (sign * sum) / weight);
  r[Slot.CLIP_VARIANCE + axis] = 1 / weight;
}

/**
 * The angle under the cubic between the two crossings of the limit, rad: value nought and known slopes on both sides
 * (Hermite). Until the axis is back: under the slope before, which fades.
 */
function shoulderExcess(r: Float64Array, axis: number, sign: number, limit: number): number {
  const last = limit - sign * along(r, axis, Slot.CLIP_LAST);
  const lastBut = limit - sign * along(r, axis, Slot.CLIP_LAST_BUT_ONE);
  const lastS = r[Slot.CLIP_LAST + 3]! - r[Slot.CLIP_LAST_BUT_ONE + 3]!;
  const rise = steeper(
    r[Slot.CLIP_KNOWN] === 2 ? (lastBut - last) / lastS : 0,
    last,
    r[Slot.CLIP_RATES + 3]!,
  );
  const spanS = r[Slot.CLIP_SPAN]! - crossing(last, rise);
  if (r[Slot.CLIP_AFTER] === 0) return rise * CREST_S * (spanS + CREST_S * Math.expm1(-spanS / CREST_S));
  const first = Slot.CLIP_RATES + STRIDE * (r[Slot.CLIP_COUNT]! - r[Slot.CLIP_AFTER]!);
  const second = first + STRIDE;
  const back = limit - sign * along(r, axis, first);
  const further = limit - sign * along(r, axis, second);
  const known = r[Slot.CLIP_AFTER]! > 1;
  const fall = steeper(known ? (further - back) / r[second + 3]! : rise, back, r[first + 3]!);
  const wholeS = spanS + r[first + 3]! - crossing(back, fall);
  return (wholeS * wholeS * (rise + fall)) / 12;
}

/** The slope of a shoulder, rad/s²: no less than it takes to reach the limit within the step to the clipped reading. */
function steeper(slope: number, below: number, stepS: number): number {
  return Math.max(0, slope, below / stepS);
}

/** Time from a reading so far below the limit to the limit, s. */
function crossing(below: number, slope: number): number {
  return slope > 0 ? Math.max(0, below) / slope : 0;
}

/**
 * Where must the excess be for the field to lie in the strapdown frame where it lay before the stretch? Linear in the
 * excess about its present value, by its lever.
 * @returns whether the field says anything
 */
function compareFields(r: Float64Array, axis: number, { magNormShare }: FusionParameters): boolean {
  seen.fill(0);
  rotate(field, r, r, 0, Slot.STRAPDOWN, Slot.FIELD);
  const lx = r[Slot.CLIP_LEVER]!;
  const ly = r[Slot.CLIP_LEVER + 1]!;
  const lz = r[Slot.CLIP_LEVER + 2]!;
  const [x, y, z] = [field[0]!, field[1]!, field[2]!];
  const jx = ly * z - lz * y;
  const jy = lz * x - lx * z;
  const jz = lx * y - ly * x;
  const [bx, by, bz] = [r[Slot.CLIP_FIELD]!, r[Slot.CLIP_FIELD + 1]!, r[Slot.CLIP_FIELD + 2]!];
  const square = x * x + y * y + z * z;
  const slope = jx * jx + jy * jy + jz * jz;
  const norm = Math.sqrt(bx * bx + by * by + bz * bz);
  if (slope < ALONG_AXIS * ALONG_AXIS * square || Math.abs(Math.sqrt(square) - norm) > magNormShare * norm)
    return false;
  seen[0] = r[Slot.CLIP_EXCESS + axis]! + (jx * (bx - x) + jy * (by - y) + jz * (bz - z)) / slope;
  seen[1] = slope / (FIELD_SHARE * FIELD_SHARE * square);
  return true;
}

/** The component along a sensor axis of a vector in body axes. */
function along(r: Float64Array, axis: number, at: number): number {
  const column = Slot.GYRO_AXES + axis;
  return r[column]! * r[at]! + r[column + 3]! * r[at + 1]! + r[column + 6]! * r[at + 2]!;
}
