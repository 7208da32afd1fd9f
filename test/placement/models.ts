/** Error models as the command builds them, for the project's own midline. */
import { Midline } from "../../bridge/body/midline.ts";
import { GAITS, type GaitName } from "../../bridge/numeric/gaits.ts";
import { RAD_PER_DEG } from "../../bridge/numeric/units.ts";
import type { ErrorModelOptions } from "../../bridge/placement/expected-error.ts";
import type { MountableRange } from "../../bridge/placement/search.ts";
import type { Interpolation } from "../../bridge/wire/messages.ts";

export const RANGE: MountableRange = { from: 0.05, to: 0.95, spacing: 0.03 };
export const NOISE = { inclination: 0.7 * RAD_PER_DEG, heading: 1 * RAD_PER_DEG };

export function swimmerWith(
  gait: GaitName,
  interpolation: Interpolation = "slerp",
): Omit<ErrorModelOptions, "moments" | "noiseMoments" | "learnedBeats"> {
  const pointCount = 41;
  return {
    gait: GAITS[gait],
    noise: NOISE,
    pointCount,
    rebuilding: (stations) => new Midline({ lengthM: 1, stations, pointCount, interpolation }),
  };
}
