/**
 * Relative rotation of neighbouring segments of a real pendulum, held to what the published fusion method's own
 * implementation scores on the same recordings (fed by linear resampling to 100 Hz): 2.07 and 2.66° (Test03), 2.19 and
 * 4.14° (Test05), 2.43 and 2.68° (Test08), 2.70° on average. Skipped, with the reason in its title, where the recordings
 * are not present.
 */
import { resolve } from "node:path";
import { describe, expect, it } from "vitest";
import { loadRig } from "../../bridge/rig/load.ts";
import { pendulumFolder, scorePendulum } from "./pendulum.ts";

const PATIENCE_MS = 240_000;
const folder = pendulumFolder(resolve(import.meta.dirname, "../../../shared/open-data"));

describe.skipIf(folder === null)(
  folder === null ? "pendulum recordings: skipped, ../shared/open-data is not there" : "pendulum recordings",
  () => {
    it(
      "imported as a three-sensor trial give the joints' rotations as well as the published implementation",
      async () => {
        const rig = loadRig("three-segment-pendulum");
        const joints: number[] = [];
        for (const name of ["Test03_Trial1", "Test05_Trial2", "Test08_Trial1"])
          joints.push(...(await scorePendulum(folder!, `Pendulum_${name}`, rig)));
        // Measured when written: 2.09 2.94, 2.09 3.71, 1.96 2.12.
        expect(joints.reduce((sum, joint) => sum + joint, 0) / joints.length).toBeLessThanOrEqual(2.7);
      },
      PATIENCE_MS,
    );
  },
);
