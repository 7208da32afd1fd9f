/** When faults act, and how much. */
import type { Fault } from "./faults.ts";
import { newJet, SteppedSignal } from "./signal.ts";

/** Whether a fault acts now. */
export function during({ startS, endS }: Fault, timeS: number): boolean {
  return timeS >= startS && timeS < endS;
}

/** A strength that rises from 0 to 1 within `rampS` of the start and falls back from the end. */
export function ramp({ startS, endS }: Fault, rampS: number) {
  const signal = new SteppedSignal(0, [
    { atS: startS, overS: rampS, to: 1 },
    { atS: endS, overS: rampS, to: 0 },
  ]);
  const jet = newJet();
  return (timeS: number) => {
    jet.value = 0;
    jet.rate = 0;
    jet.acceleration = 0;
    signal.addTo(jet, timeS);
    return jet;
  };
}

/** Adds `factor` times a vector of three at `at`. */
export function addScaled(out: Float64Array, at: number, vector: readonly number[], factor: number): void {
  for (let axis = 0; axis < 3; axis++) out[at + axis] += factor * vector[axis];
}
