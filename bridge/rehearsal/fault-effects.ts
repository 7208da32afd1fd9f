/**
 * What each fault does, at the place in the chain from the water to the wire where it would really happen: to the field,
 * to what the unit feels, to its reading, to what the hub gets from it, or to the bytes on the wire. Each effect has its
 * own random numbers, so that a fault changes nothing but what it says.
 */
import type { FaultContext, FaultEffect, MakeEffect } from "./effect.ts";
import type { Fault, FaultKind } from "./faults.ts";
import { RIG_EFFECTS } from "./rig-effects.ts";
import { SENSOR_EFFECTS } from "./sensor-effects.ts";

const EFFECTS: Record<FaultKind, MakeEffect> = { ...SENSOR_EFFECTS, ...RIG_EFFECTS };

/** The effect of one fault; make one anew for each run. */
export function effectOf(fault: Fault, context: FaultContext): FaultEffect {
  return EFFECTS[fault.kind](fault, context);
}
