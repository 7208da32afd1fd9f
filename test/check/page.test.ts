import { beforeAll, expect, test } from "vitest";
import { checkPage } from "../../bridge/check/page.ts";
import { type CheckReport, reportOf } from "../../bridge/check/report.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { writeRig } from "../support/folders.ts";
import { type Rehearsed, rehearsedCheck } from "./rehearsed.ts";

const HOSTILE = `<img src=x onerror="a()">`;
const RECORDING = {
  trial: `"><script>b()</script>`,
  startedAt: "2026-06-01T00:00:00.000Z",
  softwareVersion: "<b>",
  origin: "live: </title>",
  notes: "<iframe>&'",
  sha256: "c0ffee",
  bytes: 7,
  problem: null,
};
let checked: Rehearsed;
let hostile: CheckReport;

beforeAll(async () => {
  const path = writeRig("ribbon-foil", (rig) => {
    rig.name = HOSTILE;
    rig.sensors[0]!.name = "<svg onload=c()>";
    rig.sensors[1]!.serial = "'\"><style>*{}";
  });
  const rig = loadRig(path);
  checked = await rehearsedCheck({ rig, faults: ["stuck:S4.az@0+200"] });
  hostile = { ...reportOf(checked.run.check, rig, RECORDING, "0"), operator: "</dd><script>d()</script>" };
});

test("whatever names, notes and serial numbers hold stays text", () => {
  const page = checkPage(hostile);
  for (const tag of ["<script", "<img", "<iframe", "<svg onload", "<style>*", "<b>b", "live: </title>"]) {
    expect(page).not.toContain(tag);
  }
  expect(page).toContain("&lt;img src=x onerror=&quot;a()&quot;&gt;");
  expect(page).toContain("&lt;/dd&gt;&lt;script&gt;d()&lt;/script&gt;");
});

test("the page needs nothing beside it: no script, no address, one style", () => {
  const page = checkPage(hostile);
  expect(page).not.toMatch(/https?:|src=(?!x)|href=|url\(|@import|<script|<link/);
  expect(page.match(/<style>/g)).toHaveLength(1);
});

test("it says verdict, reasons, operator, hash, and has a picture a step that has one", () => {
  const page = checkPage(hostile);
  expect(page).toMatch(/class="verdict no-go">.*No-go/);
  expect(page).toContain("stuck axis: accel z repeats one value");
  expect(page).toContain("c0ffee");
  for (const picture of [
    "Sensors along the body",
    "gyroscope noise by sensor",
    "Directions seen by S4",
    "gyroscope headroom and accelerometer headroom by sensor",
    "Supply over the check",
  ]) {
    expect(page).toContain(picture);
  }
});

test("what a verdict on an animal's tag is not about stands with the verdict, and with each step that moves it", () => {
  const { run } = checked;
  const animal = { ...run.pipeline.rig, body: { kind: "animal" as const, lengthMm: 880 } };
  const page = checkPage(reportOf(run.check, animal, RECORDING, "0"));
  expect(page).toMatch(/class="verdict [\s\S]*never about an animal&#39;s condition[\s\S]*<h2>Sensors/);
  expect(page.match(/Handle an animal only as the approved protocol allows/g)).toHaveLength(3);
  const foil = checkPage(hostile);
  expect(foil).not.toContain("animal");
  expect(foil.match(/guards and emergency stop/g)).toHaveLength(3);
  expect(foil).toContain("residual-current protection");
});
