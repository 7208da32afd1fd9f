/**
 * Time of one nine-axis fusion update, beside the Madgwick filter of the npm package `ahrs` on the same readings in the
 * same run, and what an update, and a million of them, leave on the heap (bytes).
 */
import { runBundled } from "./bundled.ts";
import type { Measured, Summary } from "./fusion/measure.ts";

export const name = "fusion";

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const measured = await runBundled<Measured>("fusion/measure.ts", ["--expose-gc"]);
  const { fusion, relative, madgwick, sensors } = measured;
  return {
    rows: [
      {
        ...row(`ChainFusion, ${sensors} sensors`, fusion, madgwick),
        "left after a million": fusion.heapBytesLeft,
      },
      row("the same, relative heading", relative, madgwick),
      row("ahrs Madgwick", madgwick, madgwick),
    ],
    json: {
      ...measured,
      ratioOfBest: fusion.best / madgwick.best,
      ratioOfMedians: fusion.median / madgwick.median,
      relativeOverMagnetic: relative.median / fusion.median,
    },
  };
}

function row(
  filter: string,
  times: Measured["madgwick"],
  baseline: Summary,
): Record<string, string | number> {
  const rounded = (value: number, digits: number) => Number(value.toFixed(digits));
  return {
    filter,
    "best ns": rounded(times.best, 0),
    "median ns": rounded(times.median, 0),
    "ratio of best": rounded(times.best / baseline.best, 2),
    "ratio of medians": rounded(times.median / baseline.median, 2),
    "heap bytes": rounded(times.heapBytes, 1),
  };
}
