/**
 * Strapdown integration: the angular rate, less its bias, turned into rotation.
 *
 * A reading stands for the mean rate over the interval that it ends, as in the published method. Where readings were
 * lost, the missing ones are filled in on the polynomial through the two readings before the gap and those after it, and
 * integrated like any other: first through one reading after the gap, so that there is an orientation at once, and when
 * the next reading has come, again through both. An even rate is thereby bridged exactly, an even angular acceleration
 * too.
 */
import { fromRotationVector, keepUnit, multiply } from "../numeric/quaternion.ts";
import { RATES, type SensorState } from "./sensor-state.ts";

/** A step longer than this many nominal intervals has a gap in it. */
const GAP = 1.5;
const NEWEST = RATES - 1;

const turn = new Float64Array(3);
const rotation = new Float64Array(4);
const filled = new Float64Array(3);
const weights = new Float64Array(RATES);

/** Takes the newest angular rate, bias off, into the history of rates. */
export function pushRate(state: SensorState): void {
  const { rates, rateTimesS, rate, bias } = state;
  for (let i = 0; i < 3 * NEWEST; i++) rates[i] = rates[i + 3]!;
  for (let i = 0; i < NEWEST; i++) rateTimesS[i] = rateTimesS[i + 1]!;
  for (let i = 0; i < 3; i++) rates[3 * NEWEST + i] = rate[i]! - bias[i]!;
  rateTimesS[NEWEST] = state.gyroTimeS;
  if (state.rateCount < RATES) state.rateCount++;
}

/** Turns the strapdown quaternion from the reading before to the newest one. */
export function integrateRate(state: SensorState): void {
  pushRate(state);
  const { strapdown, beforeGap } = state;
  if (state.gapRevisable) {
    state.gapRevisable = false;
    strapdown.set(beforeGap);
    fillGap(state, NEWEST - 2);
  }
  if (state.gyroStepS <= GAP * state.intervalS) {
    turnBy(strapdown, state.rates, 3 * NEWEST, state.gyroStepS);
  } else {
    beforeGap.set(strapdown);
    state.gapRevisable = true;
    fillGap(state, NEWEST - 1);
  }
}

/**
 * out = the quaternion out (body -> any frame), carried on by `aheadS` seconds, or back: with the newest rate and its slope,
 * which fades, so that a long prediction ends in an even turn.
 */
export function extrapolate(
  state: SensorState,
  out: Float64Array,
  outAt: number,
  aheadS: number,
  fadeS: number,
): void {
  const { rates, rateTimesS } = state;
  const spanS = rateTimesS[NEWEST]! - rateTimesS[NEWEST - 1]!;
  const slopeFor = state.rateCount < 2 ? 0 : (fadeS * (aheadS + fadeS * Math.expm1(-aheadS / fadeS))) / spanS;
  for (let i = 0; i < 3; i++) {
    const newest = rates[3 * NEWEST + i]!;
    turn[i] = aheadS * newest + slopeFor * (newest - rates[3 * (NEWEST - 1) + i]!);
  }
  fromRotationVector(rotation, turn);
  multiply(out, out, rotation, outAt, outAt, 0);
}

/** Integrates the gap between two neighbours in the history of rates, the first at index `before`. */
function fillGap(state: SensorState, before: number): void {
  const { strapdown, rateTimesS } = state;
  const startS = rateTimesS[before]!;
  const gapS = rateTimesS[before + 1]! - startS;
  const steps = Math.max(1, Math.round(gapS / state.intervalS));
  for (let step = 1; step <= steps; step++) {
    interpolate(state, startS + (gapS * step) / steps);
    turnBy(strapdown, filled, 0, gapS / steps);
  }
}

/** filled = the rate at a time, on the polynomial (Lagrange's form) through all rates in the history. */
function interpolate(state: SensorState, timeS: number): void {
  const { rates, rateTimesS } = state;
  const oldest = RATES - state.rateCount;
  for (let node = oldest; node < RATES; node++) {
    weights[node] = 1;
    for (let other = oldest; other < RATES; other++) {
      if (other === node) continue;
      weights[node]! *= (timeS - rateTimesS[other]!) / (rateTimesS[node]! - rateTimesS[other]!);
    }
  }
  for (let i = 0; i < 3; i++) {
    filled[i] = 0;
    for (let node = oldest; node < RATES; node++) filled[i]! += weights[node]! * rates[3 * node + i]!;
  }
}

/** Turns the strapdown quaternion by one step at the rate at `at`. */
function turnBy(strapdown: Float64Array, rates: Float64Array, at: number, stepS: number): void {
  for (let i = 0; i < 3; i++) turn[i] = stepS * rates[at + i]!;
  fromRotationVector(rotation, turn);
  multiply(strapdown, strapdown, rotation);
  keepUnit(strapdown, strapdown);
}
