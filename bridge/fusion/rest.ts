/** Rest: for a while neither the angular rate nor the specific force strays from its own low-pass. */
import { stepLowPass } from "../numeric/low-pass.ts";
import { type Coefficients, Gain } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import { Slot } from "./record.ts";

/** Low-passed angular rate and specific force. */
const RATE = Slot.REST_LOW_PASS + 1;
const FORCE = RATE + 3;

/**
 * The newest angular rate and specific force: a deviation, or an even rate too great to be bias, ends rest; time without
 * brings it. Each reading is compared; the low-pass takes the mean of a short span of them at once.
 */
export function watchRest(r: Float64Array, coefficients: Coefficients, parameters: FusionParameters): void {
  for (let i = 0; i < 6; i++) r[Slot.REST_SUM + i]! += r[Slot.RATE + i]!;
  r[Slot.REST_COUNT]! += 1;
  r[Slot.REST_SPAN]! += r[Slot.FORCE_STEP]!;
  if (r[Slot.REST_SPAN]! >= parameters.restSpanS) followMean(r, coefficients);
  if (!isQuiet(r, parameters)) {
    r[Slot.REST_TIME] = 0;
    r[Slot.AT_REST] = 0;
    return;
  }
  r[Slot.REST_TIME]! += r[Slot.FORCE_STEP]!;
  if (r[Slot.REST_TIME]! >= parameters.restMinS) r[Slot.AT_REST] = 1;
}

function followMean(r: Float64Array, coefficients: Coefficients): void {
  const scale = 1 / r[Slot.REST_COUNT]!;
  for (let i = 0; i < 6; i++) r[Slot.REST_SUM + i]! *= scale;
  stepLowPass(r, Slot.REST_LOW_PASS, 6, Slot.REST_SUM, coefficients.forStep(r, Slot.REST_SPAN), Gain.REST);
  for (let i = 0; i < 6; i++) r[Slot.REST_SUM + i] = 0;
  r[Slot.REST_COUNT] = 0;
  r[Slot.REST_SPAN] = 0;
}

function isQuiet(r: Float64Array, parameters: FusionParameters): boolean {
  const { biasLimit, restRateLimit, restAccelLimit } = parameters;
  return (
    areNear(r, Slot.RATE, RATE, restRateLimit) &&
    areNear(r, Slot.FORCE, FORCE, restAccelLimit) &&
    Math.abs(r[RATE]!) <= biasLimit &&
    Math.abs(r[RATE + 1]!) <= biasLimit &&
    Math.abs(r[RATE + 2]!) <= biasLimit
  );
}

/** Are two vectors of the record less than `limit` apart? */
function areNear(r: Float64Array, a: number, b: number, limit: number): boolean {
  const x = r[a]! - r[b]!;
  const y = r[a + 1]! - r[b + 1]!;
  const z = r[a + 2]! - r[b + 2]!;
  return x * x + y * y + z * z < limit * limit;
}
