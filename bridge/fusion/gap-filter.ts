/**
 * The heading error of one gap between two sensors over time: a Kalman filter of two states, the error and its rate of
 * drift (the difference of the two gyroscopes' biases about the vertical), and its gradual correction.
 */
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { GapMeasurement } from "./gap-window.ts";

/** Where things lie in a gap's record; rad, rad/s. */
export enum Gap {
  ERROR = 0,
  DRIFT = ERROR + 1,
  /** Covariance: error with error, with drift, drift with drift. */
  EE = DRIFT + 1,
  ED = EE + 1,
  DD = ED + 1,
  /** Variance that no measurement takes away: that of the way of measuring. */
  LASTING = DD + 1,
  /** A window has measured this gap since it was reset. */
  MEASURED = LASTING + 1,
  /** Of the newest sweep: time since the one before, s; turn to take off. */
  STEP = MEASURED + 1,
  TURN = STEP + 1,
  /** Rate of that turn, rad/s; how much has been turned since the filter last went on, and how long that is ago, s. */
  TURN_RATE = TURN + 1,
  TURNED = TURN_RATE + 1,
  SINCE = TURNED + 1,
  SIZE = SINCE + 1,
}

/** Of a start: sensors mounted straight on a body that is not (20°); and their bias within data sheets. Ours, no source. */
const START = 20 * RAD_PER_DEG;
const DRIFT = 0.5 * RAD_PER_DEG;
/** At rest the fusion itself finds the bias, of both sensors to 0.03 °/s. */
const DRIFT_AT_REST = Math.SQRT2 * 0.03 * RAD_PER_DEG;
const REST_FADE_S = 2;
/** The drift wanders by 0.1 °/s in 10 s (as variance a second): a unit that warms up in the hand. Ours, no source. */
const WANDER = (0.1 * RAD_PER_DEG) ** 2 / 10;
/** Errors that come with a clipped gyroscope, as variance a second: 5° in one second. Ours, no source. */
const CLIPPED = (5 * RAD_PER_DEG) ** 2;
/** A correction takes this long, s, and never turns faster than this, rad/s. */
const CORRECT_S = 2;
const FASTEST = 5 * RAD_PER_DEG;
/** The filter goes on once this long, s: nothing is lost against windows of seconds, and much of the work is saved. */
const SPAN_S = 0.015;
/** Beyond this an angle means nothing. */
const MOST = Math.PI ** 2;

export function resetGap(g: Float64Array): void {
  g.fill(0);
  g[Gap.EE] = START * START;
  g[Gap.DD] = DRIFT * DRIFT;
}

/** Two gaps become one (sign 1), or one is parted from another (-1): `g` takes the errors of `other` in, by its sign. */
export function addGap(g: Float64Array, other: Float64Array, sign: 1 | -1): void {
  g[Gap.ERROR]! += sign * other[Gap.ERROR]!;
  g[Gap.DRIFT]! += sign * other[Gap.DRIFT]!;
  g[Gap.TURNED]! += sign * other[Gap.TURNED]!;
  for (const variance of [Gap.EE, Gap.ED, Gap.DD, Gap.LASTING]) g[variance]! += other[variance]!;
  g[Gap.MEASURED]! *= other[Gap.MEASURED]!;
}

/** Standard deviation of the gap's heading as it stands, rad: what is known to be wrong, and not corrected yet, counts too. */
export function gapSigma(g: Float64Array): number {
  return Math.sqrt(g[Gap.EE]! + g[Gap.LASTING]! + g[Gap.ERROR]! * g[Gap.ERROR]!);
}

/**
 * Time passes, Gap.STEP seconds of it, and the heading is corrected a little: Gap.TURN is what to take off the heading of
 * the sensor behind against the one before. The filter itself goes on once a span.
 */
export function advanceGap(g: Float64Array, atRest: boolean, clipped: boolean): void {
  const turn = g[Gap.TURN_RATE]! * g[Gap.STEP]!;
  g[Gap.TURN] = turn;
  g[Gap.TURNED]! += turn;
  g[Gap.SINCE]! += g[Gap.STEP]!;
  if (g[Gap.SINCE]! >= SPAN_S) predict(g, atRest, clipped);
}

function predict(g: Float64Array, atRest: boolean, clipped: boolean): void {
  const spanS = g[Gap.SINCE]!;
  g[Gap.EE] = Math.min(
    MOST,
    g[Gap.EE]! +
      spanS * (2 * g[Gap.ED]! + spanS * g[Gap.DD]!) +
      (clipped ? CLIPPED * spanS : (WANDER * spanS ** 3) / 3),
  );
  g[Gap.ED]! += spanS * g[Gap.DD]!;
  g[Gap.DD] = Math.min(DRIFT * DRIFT, g[Gap.DD]! + WANDER * spanS);
  if (atRest) {
    g[Gap.DRIFT]! *= 1 - Math.min(1, spanS / REST_FADE_S);
    g[Gap.DD] = Math.min(g[Gap.DD]!, DRIFT_AT_REST * DRIFT_AT_REST);
    const most = Math.sqrt(g[Gap.EE]! * g[Gap.DD]!);
    g[Gap.ED] = Math.max(-most, Math.min(most, g[Gap.ED]!));
  }
  const error = g[Gap.ERROR]! + g[Gap.DRIFT]! * spanS - g[Gap.TURNED]!;
  g[Gap.ERROR] = error;
  g[Gap.TURN_RATE] = Math.max(-FASTEST, Math.min(FASTEST, g[Gap.DRIFT]! + error / CORRECT_S));
  g[Gap.TURNED] = 0;
  g[Gap.SINCE] = 0;
}

/**
 * Takes a window's measurement, which speaks of the middle of the window.
 * @param expected mean of the filter's error over the window, rad
 */
export function measureGap(
  g: Float64Array,
  measured: GapMeasurement,
  expected: number,
  windowS: number,
): void {
  const back = 0.5 * windowS;
  const e = g[Gap.EE]! - back * g[Gap.ED]!;
  const d = g[Gap.ED]! - back * g[Gap.DD]!;
  const inverse = 1 / (e - back * d + measured.random);
  const innovation = measured.error - expected;
  g[Gap.ERROR]! += e * inverse * innovation;
  g[Gap.DRIFT]! += d * inverse * innovation;
  g[Gap.EE]! -= e * e * inverse;
  g[Gap.ED]! -= e * d * inverse;
  g[Gap.DD]! -= d * d * inverse;
  g[Gap.LASTING] = measured.lasting;
  g[Gap.MEASURED] = 1;
}
