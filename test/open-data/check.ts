/**
 * Orientation errors on real recordings: `npm run check:open-data [-- DIR] [--json]`. DIR is the open-data folder
 * (default ../shared/open-data beside the project). Prints RMSE in degrees of every trial: as recorded, with losses, with
 * jittered sample times, and, of the fast trials, with a clipped gyroscope; next to what the published method's own
 * implementation scores on the same files. Then, of the pendulum's recordings, the joints' rotations. Exit code 1, and one line, where there are no recordings: a check that has
 * checked nothing has not passed.
 */
import { resolve } from "node:path";
import { loadRig } from "../../bridge/rig/load.ts";
import {
  CLIP_RANGE,
  CLIPPED_TRIALS,
  lossPattern,
  meanScores,
  type ReferenceScores,
  readReference,
  readTrial,
  type Scores,
  scoreTrial,
  trialFolder,
  trialNames,
} from "./optical-imu.ts";
import { pendulumFolder, pendulumNames, scorePendulum } from "./pendulum.ts";

/** Sample times displaced by up to this share of the interval. */
const JITTER = 0.3;

/** What the published method's own implementation scores, fed by linear resampling to 100 Hz. */
const PENDULUM_PUBLISHED: Readonly<Record<string, string>> = {
  Pendulum_Test03_Trial1: "2.07 / 2.66",
  Pendulum_Test05_Trial2: "2.19 / 4.14",
  Pendulum_Test07_Trial1: "6.46 / 9.40",
  Pendulum_Test08_Trial1: "2.43 / 2.68",
};

interface Result {
  readonly complete: Scores;
  readonly withLosses: Scores;
  readonly jittered: Scores;
  /** Of trials faster than the range alone. */
  readonly clipped?: Scores | undefined;
  /** Not there for a trial that the reference file does not know. */
  readonly published?: ReferenceScores | undefined;
}

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
const results: Record<string, Result> = {};
for (const name of trialNames(folder)) results[name] = check(folder, name);
const all = Object.values(results);
const fast = all.filter((result) => result.clipped !== undefined);
const means = {
  complete: meanScores(all.map((r) => r.complete)),
  withLosses: meanScores(all.map((r) => r.withLosses)),
  jittered: meanScores(all.map((r) => r.jittered)),
  clipped: fast.length > 0 ? meanScores(fast.map((r) => r.clipped!)) : null,
  fastUnclipped: fast.length > 0 ? meanScores(fast.map((r) => r.complete)) : null,
  published: {
    totalDeg: meanOf((p) => p.total_rmse_deg),
    headingDeg: meanOf((p) => p.heading_rmse_deg),
    inclinationDeg: meanOf((p) => p.inclination_rmse_deg),
    interpolatedTotalDeg: meanOf((p) => p.with_losses.total_rmse_deg.linear_interpolation),
  },
};

const pendulum = await jointErrors();

if (asJson) console.log(JSON.stringify({ trials: results, means, pendulum }, null, 2));
else {
  console.log("RMSE in degrees; published: the method's own implementation, as in reference.json.");
  console.log("lost: 5.4 % of samples; jitter: sample times displaced by up to 30 % of the interval;");
  console.log(
    "clipped: gyroscope cut off at 500 degrees a second. error/sigma: over the stated uncertainty.\n",
  );
  console.table(
    Object.fromEntries([
      ...Object.entries(results).map(([name, r]) => [name, row(r, publishedOf(r))]),
      ["mean", row({ ...means, clipped: means.clipped ?? undefined }, means.published)],
    ]),
  );
  if (means.fastUnclipped !== null && means.clipped !== null)
    console.log(
      `Mean total of the ${fast.length} clipped trials: ${means.clipped.totalDeg.toFixed(2)}, unclipped ${means.fastUnclipped.totalDeg.toFixed(2)}.`,
    );
  else console.log("None of the trials for clipping (06, 16, 21, 29) is there.");
  if (pendulum === null) console.log(`${openData} holds no pendulum folder: its joints were not checked.`);
  else {
    console.log("\nPendulum, rotation of each joint against the cameras, RMSE in degrees.");
    console.table(
      Object.fromEntries(
        Object.entries(pendulum).map(([name, [upper, lower]]) => [
          name,
          {
            "upper joint": rounded(upper),
            "lower joint": rounded(lower),
            "publ.": PENDULUM_PUBLISHED[name] ?? "",
          },
        ]),
      ),
    );
  }
}

/** RMSE of each joint, degrees, by recording; null where there are none. */
async function jointErrors(): Promise<Record<string, number[]> | null> {
  const from = pendulumFolder(openData);
  if (from === null) return null;
  const rig = loadRig("three-segment-pendulum");
  const found: Record<string, number[]> = {};
  for (const name of pendulumNames(from)) found[name] = await scorePendulum(from, name, rig);
  return found;
}

function check(from: string, name: string): Result {
  const trial = readTrial(from, name);
  return {
    complete: scoreTrial(trial),
    withLosses: scoreTrial(trial, { lost: lossPattern(trial.samples) }),
    jittered: scoreTrial(trial, { jitter: JITTER }),
    clipped: CLIPPED_TRIALS.some((start) => name.startsWith(start))
      ? scoreTrial(trial, { gyroRange: CLIP_RANGE })
      : undefined,
    published: reference[name],
  };
}

function meanOf(pick: (scores: ReferenceScores) => number): number {
  const known = all.flatMap((r) => (r.published ? [pick(r.published)] : []));
  return known.reduce((sum, value) => sum + value, 0) / known.length;
}

function publishedOf({ published }: Result): typeof means.published | undefined {
  return (
    published && {
      totalDeg: published.total_rmse_deg,
      headingDeg: published.heading_rmse_deg,
      inclinationDeg: published.inclination_rmse_deg,
      interpolatedTotalDeg: published.with_losses.total_rmse_deg.linear_interpolation,
    }
  );
}

function rounded(value: number | undefined): number | string {
  return value === undefined ? "" : Math.round(value * 1000) / 1000;
}

function row(
  { complete, withLosses, jittered, clipped }: Omit<Result, "published">,
  published?: typeof means.published,
): Record<string, number | string> {
  return {
    total: rounded(complete.totalDeg),
    "publ.": rounded(published?.totalDeg),
    heading: rounded(complete.headingDeg),
    "publ. ": rounded(published?.headingDeg),
    incl: rounded(complete.inclinationDeg),
    "publ.  ": rounded(published?.inclinationDeg),
    lost: rounded(withLosses.totalDeg),
    "publ. interp.": rounded(published?.interpolatedTotalDeg),
    jitter: rounded(jittered.totalDeg),
    clipped: rounded(clipped?.totalDeg),
    "heading/σ": rounded(complete.headingRatio),
    "incl/σ": rounded(complete.inclinationRatio),
  };
}
