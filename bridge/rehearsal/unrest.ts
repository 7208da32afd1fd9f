/**
 * What real units do over minutes and a healthy rehearsal leaves out: gyroscope biases that wander with temperature, and
 * iron around the tank that gives every unit a field of its own, drifting too.
 */
import { RAD_PER_DEG } from "../numeric/units.ts";
import { GYRO, MAG } from "../sweep.ts";
import type { FaultEffect } from "./effect.ts";
import type { Random } from "./random.ts";

export interface Unrest {
  /** Largest bias that the wandering adds to any gyroscope axis, °/s. */
  readonly gyroBiasDegPerS?: number;
  /** Largest field that iron adds along any body axis of a unit, µT. */
  readonly fieldUT?: number;
}

/** Periods of the wandering, s: a few turns within ten minutes. */
const BIAS_PERIODS_S = [150, 500] as const;
const FIELD_PERIODS_S = [60, 300] as const;

/** The unrest of one unit. */
export function unrestOf({ gyroBiasDegPerS = 0, fieldUT = 0 }: Unrest, random: Random): FaultEffect {
  const biases = wanderers(gyroBiasDegPerS * RAD_PER_DEG, BIAS_PERIODS_S, random);
  const fields = wanderers(fieldUT, FIELD_PERIODS_S, random);
  return {
    disturb(timeS, felt) {
      for (let axis = 0; axis < 3; axis++) {
        felt[GYRO + axis] += biases[axis](timeS);
        felt[MAG + axis] += fields[axis](timeS);
      }
    },
  };
}

/** Three sums of a constant and two sinusoids, each within `largest`. */
function wanderers(largest: number, [least, most]: readonly [number, number], random: Random) {
  return Array.from({ length: 3 }, () => {
    const middle = (random.between(-1, 1) * largest) / 2;
    const waves = [0, 1].map(() => ({
      omega: (2 * Math.PI) / random.between(least, most),
      phase: random.between(0, 2 * Math.PI),
    }));
    return (timeS: number) =>
      waves.reduce((sum, { omega, phase }) => sum + (largest / 4) * Math.sin(omega * timeS + phase), middle);
  });
}
