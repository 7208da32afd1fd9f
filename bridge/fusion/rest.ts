/** Rest: for a while neither the angular rate nor the specific force strays from its own low-pass. */
import type { StepGains } from "./coefficients.ts";
import type { FusionParameters } from "./parameters.ts";
import type { SensorState } from "./sensor-state.ts";

/** The newest angular rate: a deviation, or an even rate too great to be bias, ends rest. */
export function watchRate(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const { restRate, rate } = state;
  restRate.step(gains.rest, rate);
  const limit = parameters.biasLimit;
  const [x, y, z] = [restRate.value[0]!, restRate.value[1]!, restRate.value[2]!];
  const tooFast = Math.abs(x) > limit || Math.abs(y) > limit || Math.abs(z) > limit;
  if (tooFast || squaredDistance(rate, restRate.value) >= parameters.restRateLimit ** 2) endRest(state);
}

/** The newest specific force: a deviation ends rest, time without one brings it. */
export function watchAccel(state: SensorState, gains: StepGains, parameters: FusionParameters): void {
  const { restAccel, accel } = state;
  restAccel.step(gains.rest, accel);
  if (squaredDistance(accel, restAccel.value) >= parameters.restAccelLimit ** 2) {
    endRest(state);
    return;
  }
  state.restS += state.accelStepS;
  if (state.restS >= parameters.restMinS) state.atRest = true;
}

function endRest(state: SensorState): void {
  state.restS = 0;
  state.atRest = false;
}

function squaredDistance(a: Float64Array, b: Float64Array): number {
  const x = a[0]! - b[0]!;
  const y = a[1]! - b[1]!;
  const z = a[2]! - b[2]!;
  return x * x + y * y + z * z;
}
