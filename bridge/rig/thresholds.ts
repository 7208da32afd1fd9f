/**
 * The thresholds of all detectors, config/thresholds.json. Each key: one number, its unit in its name, its reason in the
 * description. A rig file may override any under `flags`.
 */
import { z } from "zod";

export const thresholdsSchema = z.strictObject({
  lowHeadroomShare: z
    .number()
    .min(0)
    .max(1)
    .describe("Caution when less of the gyro or accelerometer range than this is free over the last second."),
});

export type Thresholds = z.infer<typeof thresholdsSchema>;
