/**
 * Lost samples, bridged. The missing rates are filled in on the polynomial through the two readings before the gap and
 * those after it, and integrated like any other: first through one reading after the gap, so that there is an orientation
 * at once, and when the next reading has come, again through both. An even rate is thereby bridged exactly, and so is an
 * even change of rate about one axis.
 */
import { conjugate, multiply, normalise, rotate, turnBy } from "../numeric/quaternion.ts";
import { FIELD_SHARE, type FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";
import { openInclination } from "./uncertainty.ts";

/** A rate and its hub time. */
const STRIDE = 4;
/** Of the four rates around a gap, in their order: the last before it and the two after it. */
const LAST_BEFORE = 1;
const FIRST_AFTER = 2;
const SECOND_AFTER = 3;

const weights = new Float64Array(4);
/** The field before the gap and now, in the strapdown frame. */
const fields = new Float64Array(6);

/** Writes the newest angular rate, bias off, and its hub time to `at`. */
export function storeRate(r: Float64Array, at: number): void {
  r[at] = r[Slot.RATE]! - r[Slot.BIAS]!;
  r[at + 1] = r[Slot.RATE + 1]! - r[Slot.BIAS + 1]!;
  r[at + 2] = r[Slot.RATE + 2]! - r[Slot.BIAS + 2]!;
  r[at + 3] = r[Slot.RATE_TIME]!;
}

/** The newest reading ends a gap: integrates across it, from the reading before. Call before the rate is taken. */
export function bridgeGap(r: Float64Array): void {
  copyFour(r, Slot.BEFORE_GAP, Slot.STRAPDOWN);
  copyFour(r, Slot.GAP_RATES, Slot.RATE_BEFORE);
  copyFour(r, Slot.GAP_RATES + STRIDE * LAST_BEFORE, Slot.TRUE_RATE);
  storeRate(r, Slot.GAP_RATES + STRIDE * FIRST_AFTER);
  r[Slot.GAP_KNOWN] = r[Slot.RATES_KNOWN]!;
  r[Slot.GAP_OPEN] = 1;
  fill(r, FIRST_AFTER);
}

/**
 * The newest reading is the second one after a gap: integrates across the gap again. By how far that turns the orientation
 * tells how far it may still be off: as between two orders of any series, half the last change.
 */
export function reviseGap(r: Float64Array): void {
  conjugate(r, r, Slot.ROTATION, Slot.STRAPDOWN);
  copyFour(r, Slot.STRAPDOWN, Slot.BEFORE_GAP);
  storeRate(r, Slot.GAP_RATES + STRIDE * SECOND_AFTER);
  r[Slot.GAP_OPEN] = 0;
  fill(r, SECOND_AFTER);
  multiply(r, r, r, Slot.ROTATION, Slot.ROTATION, Slot.STRAPDOWN);
  // Half the change is the vector part of its quaternion.
  r[Slot.GAP_VARIANCE] = r[Slot.ROTATION + 1]! ** 2 + r[Slot.ROTATION + 2]! ** 2 + r[Slot.ROTATION + 3]! ** 2;
}

/**
 * Once the gap is filled: turns the strapdown quaternion towards where the field lies as it lay before the gap, by as much
 * as the gap's variance weighs against the field's; what is left opens the corrections of inclination and heading.
 * @param fresh a field came with this reading and may be compared with the one before
 */
export function settleGap(r: Float64Array, fresh: boolean, parameters: FusionParameters): void {
  let variance = r[Slot.GAP_VARIANCE]!;
  r[Slot.GAP_VARIANCE] = 0;
  if (fresh && r[Slot.STEADY_KNOWN] === 1) {
    const share = variance / (variance + FIELD_SHARE * FIELD_SHARE);
    turnTowardsField(r, share);
    // About the field itself nothing is known: two of three axes gain.
    variance *= 1 - (2 / 3) * share;
  }
  r[Slot.HEADING_VARIANCE]! += variance / 3;
  r[Slot.TILT_VARIANCE]! += variance * (2 / 3);
  openInclination(r, parameters);
}

/** Turns the strapdown frame by a share of the small angle from the field now to the field before. */
function turnTowardsField(r: Float64Array, share: number): void {
  conjugate(r, r, Slot.ROTATION, Slot.INCLINATION);
  rotate(fields, r, r, 0, Slot.ROTATION, Slot.STEADY_FIELD);
  rotate(fields, r, r, 3, Slot.STRAPDOWN, Slot.FIELD);
  const [bx, by, bz] = [fields[0]!, fields[1]!, fields[2]!];
  const [x, y, z] = [fields[3]!, fields[4]!, fields[5]!];
  const half = (0.5 * share) / Math.sqrt((bx * bx + by * by + bz * bz) * (x * x + y * y + z * z));
  r[Slot.ROTATION] = 1;
  r[Slot.ROTATION + 1] = half * (y * bz - z * by);
  r[Slot.ROTATION + 2] = half * (z * bx - x * bz);
  r[Slot.ROTATION + 3] = half * (x * by - y * bx);
  multiply(r, r, r, Slot.STRAPDOWN, Slot.ROTATION, Slot.STRAPDOWN);
  normalise(r, r, Slot.STRAPDOWN, Slot.STRAPDOWN);
}

/** Turns the strapdown quaternion across the gap, with the rates up to and including `last`. */
function fill(r: Float64Array, last: number): void {
  const startS = r[Slot.GAP_RATES + STRIDE * LAST_BEFORE + 3]!;
  const gapS = r[Slot.GAP_RATES + STRIDE * FIRST_AFTER + 3]! - startS;
  const first = r[Slot.GAP_KNOWN] === 2 ? 0 : LAST_BEFORE;
  const steps = Math.max(1, Math.round(gapS / r[Slot.INTERVAL]!));
  for (let step = 1; step <= steps; step++) {
    weigh(r, first, last, startS + (gapS * step) / steps);
    for (let i = 0; i < 3; i++) {
      let rate = 0;
      for (let node = first; node <= last; node++)
        rate += weights[node]! * r[Slot.GAP_RATES + STRIDE * node + i]!;
      r[Slot.TURN + i] = (gapS / steps) * rate;
    }
    turnBy(r, r, r, Slot.STRAPDOWN, Slot.STRAPDOWN, Slot.TURN);
  }
}

/** weights = those of the rates from `first` to `last` at a time, on the polynomial through them (Lagrange's form). */
function weigh(r: Float64Array, first: number, last: number, timeS: number): void {
  const times = Slot.GAP_RATES + 3;
  for (let node = first; node <= last; node++) {
    weights[node] = 1;
    for (let other = first; other <= last; other++) {
      if (other === node) continue;
      const otherS = r[times + STRIDE * other]!;
      weights[node]! *= (timeS - otherS) / (r[times + STRIDE * node]! - otherS);
    }
  }
}

function copyFour(r: Float64Array, to: number, from: number): void {
  for (let i = 0; i < 4; i++) r[to + i] = r[from + i]!;
}
