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
    "Each sensor lies still for so long: its noise is then known to a tenth and its bias to 0.01 °/s.",
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
  restNoiseFactor: z
    .number()
    .min(1)
    .max(100)
    .describe(
      "A gyroscope or accelerometer may be this many times as noisy at rest as its model: units of one kind differ by less than a half (common practice, no source), and the measurement errs by a tenth.",
    ),
  restGyroBiasShare: z
    .number()
    .min(0.01)
    .max(100)
    .describe(
      "The rate at rest may be this share of the data sheet's offset on all three axes together; the quarter is for temperature.",
    ),
  restGravityShare: z
    .number()
    .min(0.01)
    .max(100)
    .describe(
      "The force at rest may be off local gravity by this share of the data sheet's offset on all three axes together; the quarter is for scale errors.",
    ),
  supplyLeastV: z
    .number()
    .min(0)
    .max(100)
    .describe(
      "The hub's supply stays above this: the least a USB port of full power may give (USB 2.0, 7.2.2, from memory).",
    ),
  temperatureLeastC: z.number().min(-100).max(100).describe("The hub is no colder: water freezes in plugs."),
  temperatureMostC: z
    .number()
    .min(-100)
    .max(150)
    .describe("The hub is no hotter: in water it should never be (common practice, no source)."),
  clockDriftPpm: z
    .number()
    .min(1)
    .max(100_000)
    .describe(
      "The hub's clock runs off the computer's by no more: two crystals of 100 ppm each at their worst (common practice, no source).",
    ),
  clockS: z
    .number()
    .min(60)
    .max(3600)
    .describe("The clocks are compared for so long: arrivals stamped to 1 ms tell 17 ppm in a minute."),
});

export type CheckLimits = z.infer<typeof checkLimitsSchema>;
