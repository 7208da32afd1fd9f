/** The bundled trials show what recordings/README.md says they do, with today's code. */
import { join } from "node:path";
import { expect, test } from "vitest";
import { runThrough } from "../../bridge/commands/run-through.ts";
import { packageRoot } from "../../bridge/paths.ts";
import { Pipeline } from "../../bridge/pipeline.ts";
import { readManifest } from "../../bridge/trial/manifest.ts";
import type { Flag } from "../../bridge/wire/flag.ts";

function flagsOf(name: string): Flag[] {
  const folder = join(packageRoot, "recordings", name);
  const { rig, startedAt } = readManifest(folder);
  const flags: Flag[] = [];
  const observer = {
    flag: (flag: Flag, change: string) => void (change === "raised" && flags.push(flag)),
  };
  runThrough(folder, new Pipeline(rig, { startedAt: new Date(startedAt), ring: false, observer }));
  return flags;
}

test("the healthy demo raises no flag", () => {
  expect(flagsOf("healthy-demo")).toEqual([]);
});

test("the troubled demo raises one flag a trouble, on the right sensor, within its span", () => {
  const flags = flagsOf("troubled-demo");
  expect(flags.map(({ kind, sensor }) => [kind, sensor])).toEqual([
    ["magnetic interference", 3],
    ["lost samples", 2],
    ["gyro saturation", 5],
    ["lost samples", -1],
    ["corrupt packets", -1],
    ["link silent", -1],
  ]);
  const spans = [
    [20, 28],
    [34, 42],
    [47, 52],
    [57, 61],
    [64, 68],
    [72, 73.5],
  ] as const;
  flags.forEach((flag, i) => {
    const [fromS, toS] = spans[i]!;
    expect(flag.startS).toBeGreaterThanOrEqual(fromS);
    expect(flag.startS).toBeLessThan(fromS + 1);
    expect(flag.endS).toBeGreaterThan(toS - 1);
    expect(flag.endS).toBeLessThan(toS + 2);
  });
});
