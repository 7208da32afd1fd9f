/**
 * Strapdown integration: the angular rate, less its bias, turned into rotation.
 *
 * A reading stands for the mean rate over the interval that it ends, as in the published method. Where readings were
 * lost, the missing ones are filled in on the polynomial through the two readings before the gap and those after it, and
 * integrated like any other: first through one reading after the gap, so that there is an orientation at once, and when
 * the next reading has come, again through both. An even rate is thereby bridged exactly, and so is an even change of
 * rate about one axis.
 */
import { fromRotationVector, keepUnit, multiply } from "../numeric/quaternion.ts";
import { Slot } from "./record.ts";

/** A step longer than this many nominal intervals has a gap in it. */
const GAP = 1.5;
/** Rates in the record's history, and the slots of one: three components and its time. */
const NODES = 4;
const STRIDE = 4;

const turn = new Float64Array(3);
const rotation = new Float64Array(4);
const weights = new Float64Array(NODES);

/** Takes the newest angular rate, bias off, into the history of rates. */
export function takeRate(r: Float64Array): void {
  for (let i: number = Slot.PAST_RATES; i < Slot.TRUE_RATE; i++) r[i] = r[i + STRIDE]!;
  r[Slot.TRUE_RATE] = r[Slot.RATE]! - r[Slot.BIAS]!;
  r[Slot.TRUE_RATE + 1] = r[Slot.RATE + 1]! - r[Slot.BIAS + 1]!;
  r[Slot.TRUE_RATE + 2] = r[Slot.RATE + 2]! - r[Slot.BIAS + 2]!;
  r[Slot.TRUE_RATE + 3] = r[Slot.RATE_TIME]!;
  if (r[Slot.RATES_KNOWN]! < NODES) r[Slot.RATES_KNOWN]! += 1;
}

/** Turns the strapdown quaternion from the reading before to the newest one. */
export function integrateRate(r: Float64Array): void {
  takeRate(r);
  if (r[Slot.GAP_OPEN] === 1) {
    r[Slot.GAP_OPEN] = 0;
    copyQuaternion(r, Slot.STRAPDOWN, Slot.BEFORE_GAP);
    fillGap(r, Slot.TRUE_RATE - 2 * STRIDE);
  }
  const stepS = r[Slot.RATE_STEP]!;
  if (stepS <= GAP * r[Slot.INTERVAL]!) {
    turn[0] = stepS * r[Slot.TRUE_RATE]!;
    turn[1] = stepS * r[Slot.TRUE_RATE + 1]!;
    turn[2] = stepS * r[Slot.TRUE_RATE + 2]!;
    turnStrapdown(r);
  } else {
    copyQuaternion(r, Slot.BEFORE_GAP, Slot.STRAPDOWN);
    r[Slot.GAP_OPEN] = 1;
    fillGap(r, Slot.TRUE_RATE - STRIDE);
  }
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
  const before = Slot.TRUE_RATE - STRIDE;
  const spanS = r[Slot.TRUE_RATE + 3]! - r[before + 3]!;
  const slopeFor =
    r[Slot.RATES_KNOWN]! < 2 ? 0 : (fadeS * (aheadS + fadeS * Math.expm1(-aheadS / fadeS))) / spanS;
  for (let i = 0; i < 3; i++) {
    const newest = r[Slot.TRUE_RATE + i]!;
    turn[i] = aheadS * newest + slopeFor * (newest - r[before + i]!);
  }
  fromRotationVector(rotation, turn);
  multiply(out, out, rotation, outAt, outAt, 0);
}

/** Integrates the gap between the rate at `before` in the history and the one after it. */
function fillGap(r: Float64Array, before: number): void {
  const startS = r[before + 3]!;
  const gapS = r[before + STRIDE + 3]! - startS;
  const steps = Math.max(1, Math.round(gapS / r[Slot.INTERVAL]!));
  for (let step = 1; step <= steps; step++) {
    weighRates(r, startS + (gapS * step) / steps);
    for (let i = 0; i < 3; i++) {
      let rate = 0;
      for (let node = 0; node < NODES; node++)
        rate += weights[node]! * r[Slot.PAST_RATES + STRIDE * node + i]!;
      turn[i] = (gapS / steps) * rate;
    }
    turnStrapdown(r);
  }
}

/** weights = those of the known rates at a time, on the polynomial through all of them (Lagrange's form). */
function weighRates(r: Float64Array, timeS: number): void {
  const times = Slot.PAST_RATES + 3;
  const oldest = NODES - r[Slot.RATES_KNOWN]!;
  for (let node = 0; node < NODES; node++) {
    weights[node] = node < oldest ? 0 : 1;
    for (let other = oldest; other < NODES; other++) {
      if (other === node) continue;
      const otherS = r[times + STRIDE * other]!;
      weights[node]! *= (timeS - otherS) / (r[times + STRIDE * node]! - otherS);
    }
  }
}

function turnStrapdown(r: Float64Array): void {
  fromRotationVector(rotation, turn);
  multiply(r, r, rotation, Slot.STRAPDOWN, Slot.STRAPDOWN, 0);
  keepUnit(r, r, Slot.STRAPDOWN, Slot.STRAPDOWN);
}

function copyQuaternion(r: Float64Array, to: number, from: number): void {
  for (let i = 0; i < 4; i++) r[to + i] = r[from + i]!;
}
