import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, test } from "vitest";
import { loadRig } from "../../../bridge/rig/load.ts";
import { createSweep, HAS_INERTIAL } from "../../../bridge/sweep.ts";
import { FlagEvidence } from "../../../bridge/trial/export/evidence.ts";
import type { Flag } from "../../../bridge/wire/flag.ts";
import { temporaryFolder } from "../fixtures.ts";

const rig = loadRig("ribbon-foil");
const flagOf = (id: number, sensor: number, startS: number): Flag => ({
  id,
  kind: "stuck axis",
  sensor,
  severity: "alarm",
  startS,
  endS: null,
  detail: "",
  advice: "",
});

/** Runs `seconds`, with each flag told at its time; gives the table's rows as objects. */
function evidence(seconds: number, flags: readonly (readonly [atS: number, flag: Flag])[]) {
  const folder = temporaryFolder();
  const kept = new FlagEvidence(folder, rig);
  const sweep = createSweep(rig.sensors.length);
  sweep.present.fill(HAS_INERTIAL);
  for (let k = 0; k < seconds * 100; k++) {
    sweep.timeS = k / 100;
    sweep.raw.forEach((_, c) => {
      sweep.raw[c] = k + c / 1000;
    });
    for (const [atS, flag] of flags) if (Math.round(atS * 100) <= k) kept.flag(flag);
    kept.sweep(sweep);
  }
  kept.finish();
  if (kept.file === null) return [];
  kept.file.finish();
  const [header, ...lines] = readFileSync(join(folder, "evidence.csv"), "utf8").trim().split(/\r?\n/);
  const names = header!.split(",");
  return lines.map((line) => Object.fromEntries(line.split(",").map((cell, i) => [names[i]!, cell])));
}

test("a sensor's flag has its readings from two seconds before the onset to two after, once", () => {
  const rows = evidence(20, [[10.3, flagOf(1, 3, 10)]]);
  expect(rows).toHaveLength(401);
  expect(rows[0]).toMatchObject({ flag: "1", sensor: "S4", time_s: "8.000000", field_x_ut: "" });
  expect(Number(rows[0]!.force_y_m_s2)).toBeCloseTo(800 + 0.031, 4);
  expect(Number(rows[0]!.rate_x_deg_s)).toBeCloseTo(((800 + 0.027) * 180) / Math.PI, 3);
  expect(rows.at(-1)).toMatchObject({ time_s: "12.000000" });
});

test("the rig's flag has every sensor's", () => {
  expect(evidence(20, [[10, flagOf(1, -1, 10)]])).toHaveLength(401 * rig.sensors.length);
});

test("one raised long after its onset has what came before all the same, and the trial's end ends it", () => {
  expect(evidence(31, [[29.5, flagOf(1, 0, 14)]])).toHaveLength(401);
  expect(evidence(11, [[10, flagOf(1, 0, 10)]])).toHaveLength(300);
});

test("without flags there is no table", () => {
  expect(evidence(1, [])).toEqual([]);
});
