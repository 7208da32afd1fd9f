/**
 * The limits of the release check, config/check.json. Each key: one number, its unit in its name, its reason in the
 * description. A rig file may override any under `check`. What a detector judges too has its limit in thresholds.ts alone.
 */
import { z } from "zod";

const share = z.number().min(0).max(1);
const seconds = z.number().min(1).max(3600);

export const checkLimitsSchema = z.strictObject({
  linkS: seconds.describe("The link is watched for at least so long: a thousand sweeps at 100 Hz."),
  deliveredShare: share.describe(
    "Of the sweeps due, and of each sensor's readings, at least this share must come: a cabled link normally loses none, and fusion carries one reading in a hundred without harm.",
  ),
  corruptShare: share.describe(
    "At most this share of packets may be corrupt: as for readings lost, as each commonly costs one.",
  ),
  stillS: seconds.describe(
    "Each sensor lies still for so long: three of the rest detector's windows tell noise to a twentieth.",
  ),
  coverageShare: share.describe(
    "Of all directions, the field is to be seen from at least this share: beyond half a sphere, irons on every axis show. Where a body cannot be turned so far, say so in the rig file.",
  ),
  fieldSpreadShare: share.describe(
    "While the body is turned through, the calibrated field's length may scatter by this share (RMS): 4 % of 50 µT bend a heading by 6° at a horizontal field of 18 µT. Calibrate anew beyond.",
  ),
  mountingOffDeg: z
    .number()
    .min(0.5)
    .max(180)
    .describe(
      "A sensor may sit this far from its mounting in the rig file: skin and strips give by some degrees (common practice, no source).",
    ),
  hardS: seconds.describe("The body is moved hard for so long: several beats."),
  hardDegPerS: z
    .number()
    .min(1)
    .max(10_000)
    .describe(
      "Moved hard: some sensor turns faster than this. A tail that beats twice a second reaches it; give the rig's own where its body is faster or slower.",
    ),
  clockS: z
    .number()
    .min(60)
    .max(3600)
    .describe("The clocks are compared for so long: arrivals stamped to 1 ms tell 17 ppm in a minute."),
});

export type CheckLimits = z.infer<typeof checkLimitsSchema>;
