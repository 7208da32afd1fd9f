/**
 * Errors of the fusion on real recordings, where they are present (test/open-data/optical-imu.ts), beside what the
 * published method's own implementation scores on the same files, degrees. Trial by trial: `npm run check:open-data`.
 */
import { resolve } from "node:path";
import {
  CLIP_RANGE,
  CLIPPED_TRIALS,
  lossPattern,
  meanScores,
  readReference,
  readTrial,
  scoreTrial,
  trialFolder,
  trialNames,
} from "../open-data/optical-imu.ts";

export const name = "fusion accuracy";

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const folder = trialFolder(resolve(import.meta.dirname, "../../../shared/open-data"));
  if (folder === null)
    return { rows: [{ measure: "no recordings: ../shared/open-data is not there" }], json: null };
  const trials = trialNames(folder).map((trial) => readTrial(folder, trial));
  const fast = trials.filter((trial) => CLIPPED_TRIALS.some((start) => trial.name.startsWith(start)));
  const reference = Object.values(readReference(folder));
  const mean = (values: number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  const complete = meanScores(trials.map((trial) => scoreTrial(trial)));
  const lossy = meanScores(trials.map((trial) => scoreTrial(trial, { lost: lossPattern(trial.samples) })));
  const clipped = meanScores(fast.map((trial) => scoreTrial(trial, { gyroRange: CLIP_RANGE })));
  const jittered = meanScores(trials.map((trial) => scoreTrial(trial, { jitter: 0.3 })));
  const rows = [
    row("total", complete.totalDeg, mean(reference.map((r) => r.total_rmse_deg))),
    row("inclination", complete.inclinationDeg, mean(reference.map((r) => r.inclination_rmse_deg))),
    row(
      "total, 5.4 % lost",
      lossy.totalDeg,
      mean(reference.map((r) => r.with_losses.total_rmse_deg.linear_interpolation)),
    ),
    row("total, sample times jittered by 30 %", jittered.totalDeg),
    row(`total, ${fast.length} fast trials clipped at 500 °/s`, clipped.totalDeg),
  ];
  return { rows, json: { complete, lossy, jittered, clipped } };
}

function row(measure: string, ours: number, published?: number): Record<string, string | number> {
  const rounded = (value: number) => Math.round(value * 1000) / 1000;
  return {
    measure,
    "RMSE, degrees": rounded(ours),
    published: published === undefined ? "" : rounded(published),
  };
}
