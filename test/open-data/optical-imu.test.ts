/**
 * Orientation errors on real recordings, held to what the published method's own implementation scores on the same files
 * (reference.json beside them). Skipped, with the reason in its title, where the recordings are not present.
 */
import { resolve } from "node:path";
import { describe, expect, it } from "vitest";
import {
  CLIP_RANGE,
  CLIPPED_TRIALS,
  lossPattern,
  meanScores,
  readTrial,
  scoreTrial,
  trialFolder,
  trialNames,
} from "./optical-imu.ts";

/** Some 690 000 samples a run, on a machine that may be busy. */
const PATIENCE_MS = 240_000;
const openData = resolve(import.meta.dirname, "../../../shared/open-data");
const folder = trialFolder(openData);

describe.skipIf(folder === null)(
  folder === null
    ? "optical-imu recordings: skipped, ../shared/open-data is not there"
    : "optical-imu recordings",
  () => {
    const trials = folder === null ? [] : trialNames(folder).map((name) => readTrial(folder, name));

    it(
      "are fused as well as by the published implementation: mean total 3.11°, inclination 0.74°",
      () => {
        const mean = meanScores(trials.map((trial) => scoreTrial(trial)));
        // The means of reference.json are 3.1098° and 0.7427°; measured when written: 3.088° and 0.693°.
        expect(mean.totalDeg).toBeLessThanOrEqual(3.11);
        expect(mean.inclinationDeg).toBeLessThanOrEqual(0.74);
        for (const ratio of [mean.headingRatio, mean.inclinationRatio]) {
          expect(ratio).toBeGreaterThan(0.5);
          expect(ratio).toBeLessThan(2);
        }
      },
      PATIENCE_MS,
    );

    it(
      "with 5.4 % of samples lost stay well below what linear interpolation gives, 6.17°",
      () => {
        const mean = meanScores(
          trials.map((trial) => scoreTrial(trial, { lost: lossPattern(trial.samples) })),
        );
        // Measured when written: 3.93°. How far off it may be is known within a factor of two.
        expect(mean.totalDeg).toBeLessThan(4);
        expect(mean.headingRatio).toBeGreaterThan(0.5);
        expect(mean.headingRatio).toBeLessThan(2);
        expect(mean.inclinationRatio).toBeGreaterThan(0.5);
        expect(mean.inclinationRatio).toBeLessThan(2);
      },
      PATIENCE_MS,
    );

    it(
      "with sample times jittered by 30 % stay within a tenth of the regular result",
      () => {
        const mean = meanScores(trials.map((trial) => scoreTrial(trial, { jitter: 0.3 })));
        expect(mean.totalDeg).toBeLessThan(1.1 * 3.1); // measured when written: 3.11°
      },
      PATIENCE_MS,
    );

    it(
      "with the gyroscope clipped at 500 °/s stay below 5° (trials 06, 16, 21, 29)",
      () => {
        const fast = trials.filter((trial) => CLIPPED_TRIALS.some((start) => trial.name.startsWith(start)));
        const mean = meanScores(fast.map((trial) => scoreTrial(trial, { gyroRange: CLIP_RANGE })));
        expect(fast.length).toBe(4);
        expect(mean.totalDeg).toBeLessThan(5); // measured when written: 3.71°
        expect(mean.headingRatio).toBeLessThan(2);
        expect(mean.inclinationRatio).toBeLessThan(2);
      },
      PATIENCE_MS,
    );
  },
);

describe("lossPattern", () => {
  it("is the published one: 5.2 to 5.5 % of a trial, none in its first 1000 samples", () => {
    const lost = lossPattern(53240);
    const count = lost.reduce((sum, one) => sum + one, 0);
    expect(lost.subarray(0, 1000).some((one) => one === 1)).toBe(false);
    // reference.json gives 5.2 % for the trial of this length.
    expect(Math.round((count / lost.length) * 1000) / 10).toBe(5.2);
  });
});
