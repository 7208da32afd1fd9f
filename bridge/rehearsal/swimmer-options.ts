/** How a simulated body swims: what can be chosen, and the choice made where nothing else is asked for. */

import type { GaitName } from "../numeric/gaits.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { Wander } from "./signal.ts";

export interface SwimmerOptions {
  readonly gait: GaitName;
  readonly frequencyHz: number;
  /** Share of the published amplitude. */
  readonly amplitude: number;
  /** Steady bend from tail tip to nose under the wave, rad, positive with the nose turned left. */
  readonly bend: number;
  /** How long the body lies still first, s: filters settle. */
  readonly restS: number;
  /** How long the first beats take to reach full amplitude, s. */
  readonly startS: number;
  /** Later changes of pace, in order of time, not overlapping. */
  readonly changes: readonly PaceChange[];
  /** rad from east, anticlockwise, at first. */
  readonly heading: number;
  /** rad turned left (right when negative), in order of time. */
  readonly turns: readonly Turn[];
  /** rad the nose is raised (lowered when negative), and the right side is lowered, in order of time. */
  readonly pitchTurns: readonly Turn[];
  readonly rollTurns: readonly Turn[];
  readonly headingWander: Wander;
  /** Nose up positive. */
  readonly pitchWander: Wander;
  /** Right side down positive. */
  readonly rollWander: Wander;
}

export interface PaceChange {
  readonly atS: number;
  readonly overS: number;
  readonly frequencyHz?: number;
  readonly amplitude?: number;
}

export interface Turn {
  readonly atS: number;
  readonly overS: number;
  readonly by: number;
}

/** A steady swimmer at about a beat a second, wandering by a few degrees. */
export const STEADY_SWIMMER: SwimmerOptions = {
  gait: "carangiform",
  frequencyHz: 1.1,
  amplitude: 1,
  bend: 0,
  restS: 3,
  startS: 2,
  changes: [],
  heading: 80 * RAD_PER_DEG,
  turns: [],
  pitchTurns: [],
  rollTurns: [],
  headingWander: { amplitude: 4 * RAD_PER_DEG, periodS: 37 },
  pitchWander: { amplitude: 3 * RAD_PER_DEG, periodS: 23 },
  rollWander: { amplitude: 5 * RAD_PER_DEG, periodS: 17 },
};
