/**
 * How far a clipped axis turned beyond its limit over a stretch of readings: from the shoulders, from earlier beats, from
 * the field and from the specific force, each by its uncertainty.
 */
import { rotate } from "../numeric/quaternion.ts";
import { HAS_ACCEL, HAS_MAG } from "../sweep.ts";
import { beatPeriod, recallBeat, recalled } from "./clip-beat.ts";
import { along, arc, shoulderArc } from "./clip-shoulders.ts";
import { FIELD_SHARE, type FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** Readings after the return of an axis that still tell about the stretch: two for the slope, the rest for the vectors. */
export const READINGS_AFTER = 4;
/** Uncertainty of the shoulders' excess, as a share of itself: not yet back, back, and back with the beat known ... */
const OPEN_SHARE = 1;
const SHOULDER_SHARE = 0.3;
const BEAT_SHARE = 0.2;
/** ... and this share of the angle turned at the limit. Ours, no source. */
const LIMIT_SHARE = 0.02;
/** A field or force closer than this (sine) to the axis says nothing of turns about it. */
const ALONG_AXIS = 0.1;
/** Variance of a specific force at rest, (m/s²)²: noise and an uncalibrated accelerometer's bias. Ours, no source. */
const FORCE_VARIANCE = 0.2 ** 2;

/**
 * A body may accelerate most just where it turns fastest, and does so in each beat: against its mean square, this is held to
 * be the square of what a force may be off. Ours, no source: a sinusoid's crest, with a margin.
 */
const CREST_SQUARE = 4;

const vector = new Float64Array(3);
/**
 * What a vector says: excess (rad), the square of the vector's change with it, and the square of the difference that no
 * excess takes away.
 */
const seen = new Float64Array(3);
/** Weight (1/rad²) and weighted sum of what the vectors say. */
const newest = new Float64Array(2);

/**
 * Writes the excess (rad, in the sense of the clipped rate) of a sensor axis, its variance, and the part of its deviation
 * that is the shape's. Call with the strapdown quaternion and the axis's lever at the newest reading.
 * @param fresh presence bits of what came with the newest reading and may be compared with what was before
 */
export function estimateExcess(
  r: Float64Array,
  axis: number,
  fresh: number,
  parameters: FusionParameters,
): void {
  const rate = along(r, axis, Slot.CLIP_RATES);
  const sign = Math.sign(rate);
  const limit = Math.abs(rate);
  const ended = r[Slot.CLIP_AFTER]! > 0;
  const joined = (r[Slot.CLIP_JOINED]! & (1 << axis)) !== 0;
  const periodS = joined ? 0 : beatPeriod(r, axis, sign);
  shoulderArc(r, axis, sign, limit, periodS);
  const shape = !ended ? OPEN_SHARE : periodS > 0 ? BEAT_SHARE : SHOULDER_SHARE;
  const least = (LIMIT_SHARE * limit * r[Slot.CLIP_SPAN]!) ** 2;
  let shaped = 1 / ((shape * arc[0]!) ** 2 + least);
  seeVectors(r, axis, fresh, parameters);
  let weight = shaped + newest[0]!;
  let sum = shaped * sign * arc[0]! + newest[1]!;
  r[Slot.CLIP_OWN_WEIGHT + axis] = weight;
  r[Slot.CLIP_OWN_SUM + axis] = sum;
  if (periodS > 0 && recallBeat(r, axis, sign)) {
    // A beat that turns out unlike the earlier ones is not theirs.
    const unlike = ended ? recalled[0]! - (sign * sum) / weight : 0;
    const beats = 1 / (recalled[1]! + unlike * unlike + least);
    weight += beats;
    sum += beats * sign * recalled[0]!;
    shaped += beats;
  }
  const excess = sign * Math.max(0, (sign * sum) / weight);
  r[Slot.CLIP_EXCESS + axis] = excess;
  r[Slot.CLIP_VARIANCE + axis] = 1 / weight;
  r[Slot.CLIP_SHAPE + axis] = (shaped / weight) * shape * excess;
}

/**
 * Writes to `newest` what field and force say: while the axis is clipped the newest ones alone, afterwards the sum of all
 * since. The body's acceleration hardly changes meanwhile, so that all forces together count as one.
 */
function seeVectors(r: Float64Array, axis: number, fresh: number, parameters: FusionParameters): void {
  const ended = r[Slot.CLIP_AFTER]! > 0;
  newest.fill(0);
  if (fresh & HAS_MAG && compareFields(r, axis, parameters)) addSeen(FIELD_SHARE * FIELD_SHARE);
  if (fresh & HAS_ACCEL && compareForces(r, axis)) addSeen(ended ? READINGS_AFTER : 1);
  if (!ended) return;
  r[Slot.CLIP_SEEN_WEIGHT + axis]! += newest[0]!;
  r[Slot.CLIP_SEEN_SUM + axis]! += newest[1]!;
  newest[0] = r[Slot.CLIP_SEEN_WEIGHT + axis]!;
  newest[1] = r[Slot.CLIP_SEEN_SUM + axis]!;
}

/** Adds what `seen` says. @param variance of the vector, in the units of seen[1] */
function addSeen(variance: number): void {
  const weight = seen[1]! / variance;
  newest[0]! += weight;
  newest[1]! += weight * seen[0]!;
}

/** The field against the one before the stretch: seen[1] in shares of its square. @returns whether it says anything */
function compareFields(r: Float64Array, axis: number, { magNormShare }: FusionParameters): boolean {
  const square = compare(r, axis, Slot.FIELD, Slot.CLIP_FIELD);
  if (square === 0) return false;
  const [bx, by, bz] = [r[Slot.CLIP_FIELD]!, r[Slot.CLIP_FIELD + 1]!, r[Slot.CLIP_FIELD + 2]!];
  const norm = Math.sqrt(bx * bx + by * by + bz * bz);
  if (Math.abs(Math.sqrt(square) - norm) > magNormShare * norm) return false;
  seen[1]! /= square;
  return true;
}

/**
 * The specific force against gravity's before the stretch: seen[1] in shares of its variance, that of the body's own
 * acceleration: its level around the stretch, or, if that is more, what the newest force shows of it.
 */
function compareForces(r: Float64Array, axis: number): boolean {
  if (compare(r, axis, Slot.FORCE, Slot.CLIP_GRAVITY) === 0) return false;
  seen[1]! /= FORCE_VARIANCE + CREST_SQUARE * Math.max(r[Slot.ACCELERATION]!, seen[2]!);
  return true;
}

/**
 * Where must the excess be for the vector at `now` (body axes) to lie in the strapdown frame where `before` does? Linear in
 * the excess about its present value, by its lever.
 * @returns the vector's square; 0 where it is too close to the axis
 */
function compare(r: Float64Array, axis: number, now: number, before: number): number {
  rotate(vector, r, r, 0, Slot.STRAPDOWN, now);
  const lx = r[Slot.CLIP_LEVER]!;
  const ly = r[Slot.CLIP_LEVER + 1]!;
  const lz = r[Slot.CLIP_LEVER + 2]!;
  const [x, y, z] = [vector[0]!, vector[1]!, vector[2]!];
  const jx = ly * z - lz * y;
  const jy = lz * x - lx * z;
  const jz = lx * y - ly * x;
  const [dx, dy, dz] = [r[before]! - x, r[before + 1]! - y, r[before + 2]! - z];
  const square = x * x + y * y + z * z;
  const slope = jx * jx + jy * jy + jz * jz;
  if (slope < ALONG_AXIS * ALONG_AXIS * square) return 0;
  const more = (jx * dx + jy * dy + jz * dz) / slope;
  seen[0] = r[Slot.CLIP_EXCESS + axis]! + more;
  seen[1] = slope;
  seen[2] = Math.max(0, dx * dx + dy * dy + dz * dz - more * more * slope);
  return square;
}
