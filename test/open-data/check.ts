/**
 * Orientation errors on real recordings: `npm run check:open-data [-- DIR] [--json]`. DIR is the open-data folder
 * (default ../shared/open-data beside the project). Prints RMSE in degrees next to what the published method's own
 * implementation scores on the same files.
 */
import { resolve } from "node:path";
import {
  lossPattern,
  meanScores,
  readReference,
  readTrial,
  type Scores,
  scoreTrial,
  trialFolder,
  trialNames,
} from "./optical-imu.ts";

const asJson = process.argv.includes("--json");
const named = process.argv.slice(2).find((word) => !word.startsWith("--"));
const openData = resolve(named ?? resolve(import.meta.dirname, "../../../shared/open-data"));

const folder = trialFolder(openData);
if (folder === null) {
  console.error(
    `No recordings to check: ${openData} holds no optical-imu folder with a reference.json. Nothing was checked.`,
  );
  process.exit(1);
}

const reference = readReference(folder);
const results = trialNames(folder).map((name) => {
  const trial = readTrial(folder, name);
  const lost = lossPattern(trial.samples);
  return {
    name,
    complete: scoreTrial(trial),
    withLosses: scoreTrial(trial, lost),
    published: reference[name]!,
  };
});
const complete = meanScores(results.map((r) => r.complete));
const withLosses = meanScores(results.map((r) => r.withLosses));
const published = meanScores(
  results.map((r) => ({
    totalDeg: r.published.total_rmse_deg,
    headingDeg: r.published.heading_rmse_deg,
    inclinationDeg: r.published.inclination_rmse_deg,
  })),
);
const interpolated =
  results.reduce((sum, r) => sum + r.published.with_losses.total_rmse_deg.linear_interpolation, 0) /
  results.length;

if (asJson) {
  console.log(
    JSON.stringify({ trials: results, means: { complete, withLosses, published, interpolated } }, null, 2),
  );
} else {
  console.log("RMSE in degrees. Published: the method's own implementation, as in reference.json.\n");
  console.table(
    Object.fromEntries([
      ...results.map((r) => [
        r.name,
        row(
          r.complete,
          r.withLosses,
          {
            totalDeg: r.published.total_rmse_deg,
            headingDeg: r.published.heading_rmse_deg,
            inclinationDeg: r.published.inclination_rmse_deg,
          },
          r.published.with_losses.total_rmse_deg.linear_interpolation,
        ),
      ]),
      ["mean", row(complete, withLosses, published, interpolated)],
    ]),
  );
}

function row(
  ours: Scores,
  lossy: Scores,
  theirs: Scores,
  theirsInterpolated: number,
): Record<string, number> {
  const rounded = (value: number) => Math.round(value * 1000) / 1000;
  return {
    total: rounded(ours.totalDeg),
    published: rounded(theirs.totalDeg),
    heading: rounded(ours.headingDeg),
    "published ": rounded(theirs.headingDeg),
    inclination: rounded(ours.inclinationDeg),
    "published  ": rounded(theirs.inclinationDeg),
    "total, 5.4 % lost": rounded(lossy.totalDeg),
    "published, interpolated": rounded(theirsInterpolated),
  };
}
