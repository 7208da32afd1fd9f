/**
 * Strapdown integration: the angular rate, less its bias, turned into rotation. A reading stands for the mean rate over
 * the interval that it ends, as in the published method.
 */
import { turnBy } from "../numeric/quaternion.ts";
import { bridgeGap, reviseGap, storeRate } from "./gap.ts";
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
export function integrateRate(r: Float64Array): void {
  const stepS = r[Slot.RATE_STEP]!;
  if (r[Slot.GAP_OPEN] === 1) reviseGap(r);
  if (stepS > GAP * r[Slot.INTERVAL]!) {
    bridgeGap(r);
    takeRate(r);
    return;
  }
  takeRate(r);
  r[Slot.TURN] = stepS * r[Slot.TRUE_RATE]!;
  r[Slot.TURN + 1] = stepS * r[Slot.TRUE_RATE + 1]!;
  r[Slot.TURN + 2] = stepS * r[Slot.TRUE_RATE + 2]!;
  turnBy(r, r, r, Slot.STRAPDOWN, Slot.STRAPDOWN, Slot.TURN);
}

/**
 * Carries the quaternion at `outAt` (body -> any frame) on by `aheadS` seconds, or back: with the newest rate and its
 * slope, which fades, so that a long prediction ends in an even turn.
 */
export function extrapolate(
  r: Float64Array,
  out: Float64Array,
  outAt: number,
  aheadS: number,
  fadeS: number,
): void {
  const spanS = r[Slot.TRUE_RATE + 3]! - r[Slot.RATE_BEFORE + 3]!;
  const faded = fadeS * (aheadS + fadeS * Math.expm1(-aheadS / fadeS));
  const slope = r[Slot.RATES_KNOWN]! < 2 ? 0 : faded / spanS;
  for (let i = 0; i < 3; i++) {
    const newest = r[Slot.TRUE_RATE + i]!;
    r[Slot.TURN + i] = aheadS * newest + slope * (newest - r[Slot.RATE_BEFORE + i]!);
  }
  turnBy(out, out, r, outAt, outAt, Slot.TURN);
}
