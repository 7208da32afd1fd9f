/**
 * What the shoulders of a clipped stretch, the readings before and after it, say of the angle turned beyond the limit.
 *
 *     the axis is back, and the beat is known   an arc of that frequency, with an offset, through two readings on each side
 *     the axis is back                          the cubic between the two crossings of the limit (Hermite's form)
 *     not yet back                              the slope before, fading as it would on a crest half as high again
 *
 * Ours, no source; exact for a sinusoid about any mean, whatever the sampling, where the beat is known.
 */
import { Slot } from "./record.ts";

/** Height of a crest of which only the near side is known, as a share of the limit. */
const CREST = 0.5;
/** A reading of the stretch: rate (3) and step. */
const STRIDE = 4;
/** Beyond this phase from its middle an arc says little of its crest, rad. */
const FAR = 2;
/** A reading this many times the limit below it is clipped on the other side. */
const OTHER_LIMIT = 1.99;

/** What shoulderArc found: the angle beyond the limit, rad, and once the axis is back, hub time of the middle. */
export const arc = new Float64Array(2);

/**
 * Writes `arc` for a sensor axis of the stretch at hand.
 * @param sign of the clipped rate
 * @param limit its size, rad/s
 * @param periodS of the beat, s; 0 where it is not known
 */
export function shoulderArc(
  r: Float64Array,
  axis: number,
  sign: number,
  limit: number,
  periodS: number,
): void {
  const lastS = r[Slot.CLIP_LAST + 3]!;
  const last = limit - sign * along(r, axis, Slot.CLIP_LAST);
  const lastBut = limit - sign * along(r, axis, Slot.CLIP_LAST_BUT_ONE);
  const slope = r[Slot.CLIP_KNOWN] === 2 ? (lastBut - last) / (lastS - r[Slot.CLIP_LAST_BUT_ONE + 3]!) : 0;
  const rise = steeper(slope, last, r[Slot.CLIP_RATES + 3]!);
  const enteredS = lastS + crossing(last, rise);
  const clippedS = lastS + r[Slot.CLIP_SPAN]!;
  const after = r[Slot.CLIP_AFTER]!;
  if (after === 0) {
    arc[0] = openCrest(limit, rise, clippedS - enteredS);
    return;
  }
  const first = Slot.CLIP_RATES + STRIDE * (r[Slot.CLIP_COUNT]! - after);
  const second = first + STRIDE;
  const back = limit - sign * along(r, axis, first);
  const further = limit - sign * along(r, axis, second);
  const fall = steeper(after > 1 ? (further - back) / r[second + 3]! : rise, back, r[first + 3]!);
  const leftS = clippedS + r[first + 3]! - crossing(back, fall);
  arc[0] = ((leftS - enteredS) ** 2 * (rise + fall)) / 12;
  arc[1] = 0.5 * (leftS + enteredS);
  const known = periodS > 0 && after > 1 && r[Slot.CLIP_KNOWN] === 2;
  // A reading at the other limit is no reading of the arc.
  if (known && Math.max(lastBut, further) < OTHER_LIMIT * limit)
    fitBeat(r, first, (2 * Math.PI) / periodS, 0.5 * (last + back), 0.5 * (lastBut + further));
}

/** The angle under a slope at the limit that fades. */
function openCrest(limit: number, rise: number, spanS: number): number {
  if (rise === 0) return 0;
  const fadeS = (CREST * limit) / rise;
  return rise * fadeS * (spanS + fadeS * Math.expm1(-spanS / fadeS));
}

/**
 * Writes the angle under a cosine about the middle, with an offset, through the means of the inner two and of the outer two
 * readings around the stretch, if they are near enough to tell.
 * @param first where the first reading after it lies
 * @param inner how far below the limit the inner ones are, and the outer ones, rad/s
 */
function fitBeat(r: Float64Array, first: number, omega: number, inner: number, outer: number): void {
  const middleS = arc[1]!;
  const lastS = r[Slot.CLIP_LAST + 3]!;
  const clippedS = lastS + r[Slot.CLIP_SPAN]!;
  const backS = clippedS + r[first + 3]!;
  const lastBut = omega * (r[Slot.CLIP_LAST_BUT_ONE + 3]! - middleS);
  const further = omega * (backS + r[first + STRIDE + 3]! - middleS);
  if (Math.max(-lastBut, further) > FAR) return;
  const innerCosine = 0.5 * (Math.cos(omega * (lastS - middleS)) + Math.cos(omega * (backS - middleS)));
  const outerCosine = 0.5 * (Math.cos(lastBut) + Math.cos(further));
  const amplitude = (outer - inner) / (innerCosine - outerCosine);
  // A reading stands for the half steps on both sides of it.
  const from = omega * (lastS + 0.5 * r[Slot.CLIP_RATES + 3]! - middleS);
  const to = omega * (clippedS + 0.5 * r[first + 3]! - middleS);
  const under = amplitude * (Math.sin(to) - Math.sin(from) - innerCosine * (to - from)) - inner * (to - from);
  arc[0] = Math.max(0, under / omega);
}

/** The component along a sensor axis of a vector in body axes. */
export function along(r: Float64Array, axis: number, at: number): number {
  const column = Slot.GYRO_AXES + axis;
  return r[column]! * r[at]! + r[column + 3]! * r[at + 1]! + r[column + 6]! * r[at + 2]!;
}

/** The slope of a shoulder, rad/s²: no less than it takes to reach the limit within the step to the clipped reading. */
function steeper(slope: number, below: number, stepS: number): number {
  return Math.max(0, slope, below / stepS);
}

/** Time from a reading so far below the limit to the limit, s. */
function crossing(below: number, slope: number): number {
  return slope > 0 ? Math.max(0, below) / slope : 0;
}
