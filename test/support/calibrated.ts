/** A rig as calibration leaves it. */
import type { Rig } from "../../bridge/rig/load.ts";

/** Biases that remain: a tenth of a degree a second, a few milli-g. */
export function calibrated(rig: Rig): Rig {
  return {
    ...rig,
    models: rig.models.map((model) => ({
      ...model,
      gyro: { ...model.gyro, biasDegPerS: 0.1 },
      accel: { ...model.accel, biasMilliG: 3 },
    })),
  };
}
