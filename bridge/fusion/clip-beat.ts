/**
 * A swimming body repeats: what earlier beats turned beyond the limit, on the same sensor axis and in the same sense,
 * tells what this one does. Remembered are the period from stretch to stretch, how long they were and what they turned by
 * their own evidence; it counts once two periods have agreed, and by how well they did. A stretch out of time begins anew.
 * Ours, no source.
 */
import { Slot } from "./record.ts";

/** Where things lie in one axis's and sense's memory. */
enum Beat {
  /** Hub time of the newest stretch's middle, s, and how many periods agreed in a row; 0 in both: none yet. */
  MIDDLE = 0,
  PERIODS = MIDDLE + 1,
  PERIOD = PERIODS + 1,
  /** Of the stretches: length (s), angle beyond the limit (rad, unsigned), and the variance of that, scatter included. */
  SPAN = PERIOD + 1,
  EXCESS = SPAN + 1,
  VARIANCE = EXCESS + 1,
  SIZE = VARIANCE + 1,
}

/** A period within this share of the mean agrees. */
const AGREEMENT = 0.15;
/** Periods that must have agreed, and over how many the mean goes. */
const ENOUGH = 2;
const MEMORY = 4;

/** What was recalled: the angle turned beyond the limit until now (rad), and its variance. */
export const recalled = new Float64Array(2);

/** Period of the beat, s; 0 where none is known. */
export function beatPeriod(r: Float64Array, axis: number, sign: number): number {
  const at = beatAt(axis, sign);
  return r[at + Beat.PERIODS]! >= ENOUGH ? r[at + Beat.PERIOD]! : 0;
}

/**
 * Writes `recalled` for the stretch at hand.
 * @returns whether it came in time: else there is nothing to recall
 */
export function recallBeat(r: Float64Array, axis: number, sign: number): boolean {
  const at = beatAt(axis, sign);
  const dueS = r[at + Beat.MIDDLE]! + r[at + Beat.PERIOD]! - 0.5 * r[at + Beat.SPAN]!;
  if (Math.abs(r[Slot.CLIP_LAST + 3]! - dueS) > AGREEMENT * r[at + Beat.PERIOD]!) return false;
  const u = r[Slot.CLIP_AFTER]! > 0 ? 1 : Math.min(1, r[Slot.CLIP_SPAN]! / r[at + Beat.SPAN]!);
  const share = u * u * (3 - 2 * u);
  recalled[0] = share * r[at + Beat.EXCESS]!;
  recalled[1] = share * share * r[at + Beat.VARIANCE]!;
  return true;
}

/** Remembers a whole stretch by its own evidence alone. */
export function rememberBeat(
  r: Float64Array,
  axis: number,
  sign: number,
  middleS: number,
  excess: number,
  variance: number,
): void {
  const at = beatAt(axis, sign);
  const spanS = r[Slot.CLIP_SPAN]!;
  const periodS = middleS - r[at + Beat.MIDDLE]!;
  const first = r[at + Beat.PERIODS] === 0;
  const agrees = first || Math.abs(periodS - r[at + Beat.PERIOD]!) <= AGREEMENT * r[at + Beat.PERIOD]!;
  const known = r[at + Beat.MIDDLE] !== 0 && agrees ? r[at + Beat.PERIODS]! + 1 : 0;
  r[at + Beat.MIDDLE] = middleS;
  r[at + Beat.PERIODS] = Math.min(known, MEMORY);
  if (known === 0) {
    r[at + Beat.SPAN] = spanS;
    r[at + Beat.EXCESS] = excess;
    r[at + Beat.VARIANCE] = variance;
    return;
  }
  const share = 1 / Math.min(known + 1, MEMORY);
  const off = excess - r[at + Beat.EXCESS]!;
  r[at + Beat.PERIOD]! += (periodS - r[at + Beat.PERIOD]!) / Math.min(known, MEMORY);
  r[at + Beat.SPAN]! += share * (spanS - r[at + Beat.SPAN]!);
  r[at + Beat.EXCESS]! += share * off;
  r[at + Beat.VARIANCE]! += share * (variance + off * off - r[at + Beat.VARIANCE]!);
}

function beatAt(axis: number, sign: number): number {
  return Slot.BEATS + Beat.SIZE * (2 * axis + (sign > 0 ? 0 : 1));
}
