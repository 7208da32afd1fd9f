/**
 * Time of one nine-axis fusion update, beside the Madgwick filter of the npm package `ahrs` on the same readings in the
 * same run, and what an update, and a million of them, leave on the heap (bytes). Measured as it ships: bundled with the build's own settings, and run by
 * plain Node in a process of its own (a TypeScript loader in the process slows the code by a quarter).
 */
import { execFileSync } from "node:child_process";
import { join } from "node:path";
import { build } from "esbuild";
import type { Measured, Summary } from "./fusion/measure.ts";

export const name = "fusion";

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const outfile = join(import.meta.dirname, "../../dist/bench/fusion.mjs");
  await build({
    entryPoints: [join(import.meta.dirname, "fusion/measure.ts")],
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    packages: "external",
    outfile,
    logLevel: "warning",
  });
  const measured = JSON.parse(
    execFileSync(process.execPath, ["--expose-gc", outfile], { encoding: "utf8" }),
  ) as Measured;
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
