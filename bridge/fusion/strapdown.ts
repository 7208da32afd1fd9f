/**
 * Strapdown integration: the angular rate, less its bias, turned into rotation. A reading stands for the mean rate over
 * the interval that it ends, as in the published method; so do specific force and field, which therefore belong to the
 * middle of the turn. (It is the same if all are read at one instant: then the turn leads by half a step.)
 */
import { turnBy } from "../numeric/quaternion.ts";
import { addToStretch } from "./clipping.ts";
import { bridgeGap, reviseGap, storeRate } from "./gap.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** A step longer than this many nominal intervals has a gap in it. */
const GAP = 1.5;

/** Takes the newest angular rate. */
export function takeRate(r: Float64Array): void {
  r[Slot.RATE_BEFORE] = r[Slot.TRUE_RATE]!;
  r[Slot.RATE_BEFORE + 1] = r[Slot.TRUE_RATE + 1]!;
  r[Slot.RATE_BEFORE + 2] = r[Slot.TRUE_RATE + 2]!;
  r[Slot.RATE_BEFORE + 3] = r[Slot.TRUE_RATE + 3]!;
  storeRate(r, Slot.TRUE_RATE);
  if (r[Slot.RATES_KNOWN]! < 2) r[Slot.RATES_KNOWN]! += 1;
}

/** Turns the strapdown quaternion from the reading before to the newest one, over the true step. */
export function integrateRate(r: Float64Array, parameters: FusionParameters): void {
  const stepS = r[Slot.RATE_STEP]!;
  if (r[Slot.GAP_OPEN] === 1) reviseGap(r);
  if (r[Slot.CLIPPED_AXES] !== 0 || r[Slot.CLIP_COUNT] !== 0) {
    addToStretch(r, parameters);
    takeRate(r);
    return;
  }
  if (stepS > GAP * r[Slot.INTERVAL]!) {
    bridgeGap(r);
    takeRate(r);
    return;
  }
  takeRate(r);
  r[Slot.TURN] = stepS * r[Slot.TRUE_RATE]!;
  r[Slot.TURN + 1] = stepS * r[Slot.TRUE_RATE + 1]!;
  r[Slot.TURN + 2] = stepS * r[Slot.TRUE_RATE + 2]!;
  addConing(r);
  turnBy(r, r, r, Slot.STRAPDOWN, Slot.STRAPDOWN, Slot.TURN);
}

/** Carries a vector of the newest reading, body axes, from the middle of the newest turn to its end. */
export function carryToEnd(r: Float64Array, at: number): void {
  const x = r[at]!;
  const y = r[at + 1]!;
  const z = r[at + 2]!;
  const tx = 0.5 * r[Slot.TURN]!;
  const ty = 0.5 * r[Slot.TURN + 1]!;
  const tz = 0.5 * r[Slot.TURN + 2]!;
  r[at] = x - (ty * z - tz * y);
  r[at + 1] = y - (tz * x - tx * z);
  r[at + 2] = z - (tx * y - ty * x);
}

/**
 * Adds what the turn about an axis that itself turns leaves out of the mean rate: (1/12) times the cross product of the
 * turn before and this one. From Bortz's equation for a rate that changes evenly (J. E. Bortz, "A new mathematical
 * formulation for strapdown inertial navigation", IEEE Trans. Aerosp. Electron. Syst. AES-7(1), 1971, 61-66; coefficient
 * as in P. G. Savage, "Strapdown inertial navigation integration algorithm design part 1", J. Guid. Control Dyn. 21(1),
 * 1998, 19-28; both from memory; a test holds it to the closed form of a coning motion).
 */
function addConing(r: Float64Array): void {
  const share = (r[Slot.RATE_STEP]! * r[Slot.RATE_STEP]!) / 12;
  const ax = r[Slot.RATE_BEFORE]!;
  const ay = r[Slot.RATE_BEFORE + 1]!;
  const az = r[Slot.RATE_BEFORE + 2]!;
  const bx = r[Slot.TRUE_RATE]!;
  const by = r[Slot.TRUE_RATE + 1]!;
  const bz = r[Slot.TRUE_RATE + 2]!;
  r[Slot.TURN]! += share * (ay * bz - az * by);
  r[Slot.TURN + 1]! += share * (az * bx - ax * bz);
  r[Slot.TURN + 2]! += share * (ax * by - ay * bx);
}

/**
 * Carries the quaternion at `outAt` (body -> any frame) on by `aheadS` seconds, or back: with the newest rate and its
 * slope, which fades, so that a long prediction ends in an even turn. Going back, the newest rate is that of the middle of
 * the newest turn.
 */
export function extrapolate(
  r: Float64Array,
  out: Float64Array,
  outAt: number,
  aheadS: number,
  fadeS: number,
): void {
  const spanS = r[Slot.TRUE_RATE + 3]! - r[Slot.RATE_BEFORE + 3]!;
  const faded =
    aheadS < 0 ? 0.5 * aheadS * (aheadS + spanS) : fadeS * (aheadS + fadeS * Math.expm1(-aheadS / fadeS));
  const slope = r[Slot.RATES_KNOWN]! < 2 ? 0 : faded / spanS;
  for (let i = 0; i < 3; i++) {
    const newest = r[Slot.TRUE_RATE + i]!;
    r[Slot.TURN + i] = aheadS * newest + slope * (newest - r[Slot.RATE_BEFORE + i]!);
  }
  turnBy(out, out, r, outAt, outAt, Slot.TURN);
}
