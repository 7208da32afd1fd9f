/** bendwatch calibrate, as a user runs it, on rehearsed trials; and what a trial then keeps of it. */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, onTestFinished, test } from "vitest";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { saveRecord } from "../../bridge/rig/calibration-record.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { readManifest } from "../../bridge/trial/manifest.ts";
import { bendwatch } from "../support/bridge-process.ts";
import { fingerprints, temporaryFolder, writeRig } from "../support/folders.ts";
import { openPty } from "../support/pty.ts";

const YAWS = [90, -120, 45, 180, 10, -60];

/** A rig whose sensors have serial numbers and a records folder of its own. */
function rigWith(records: string, mounted: boolean): string {
  return writeRig("ribbon-foil", (rig) => {
    rig.calibrations = records;
    rig.sensors.forEach((sensor, i) => {
      sensor.serial = `U${i + 1}`;
      if (mounted) sensor.mounting = { yawDeg: YAWS[i], pitchDeg: 30, rollDeg: -20 };
    });
  });
}

async function rehearse(rig: string, seconds: number): Promise<string> {
  const trial = join(temporaryFolder(), "trial");
  const args = ["--rate", "max", "--no-dashboard", "--seconds", `${seconds}`, "--record", trial];
  expect(await bendwatch("rehearse", "--rig", rig, ...args)).toMatchObject({ code: 0 });
  return trial;
}

test("mountings are found from a trial and saved, and the next run uses them", async () => {
  const records = join(temporaryFolder(), "records");
  const plain = rigWith(records, false);
  const trial = await rehearse(rigWith(records, true), 18);
  const { code, out } = await bendwatch("calibrate", "--kind", "mounting", "--trial", trial, "--rig", plain);
  expect(code).toBe(0);
  expect(out).toMatch(/Hold the body straight, still and level\.[\s\S]*Now bend the body[\s\S]*S6: yaw/);
  expect(out.match(/saved as /g)).toHaveLength(6);
  const found = loadRig(plain);
  expect(found.recordsUsed).toHaveLength(6);
  found.sensors.forEach(({ mounting }, i) => {
    // Half a degree of rotation, at 30° of pitch up to 0.6° of yaw.
    const off = mounting.yawDeg - YAWS[i]!;
    expect(Math.abs(off - 360 * Math.round(off / 360))).toBeLessThan(0.6);
    expect(Math.abs(mounting.pitchDeg - 30)).toBeLessThan(0.5);
  });
});

test("a trial keeps the calibration it was recorded with; an export takes newer ones only when asked", async () => {
  const records = join(temporaryFolder(), "records");
  const trial = await rehearse(rigWith(records, false), 1);
  expect(readManifest(trial).rig.recordsUsed).toEqual([]);
  saveRecord(records, {
    serial: "U4",
    kind: "mounting",
    date: "2026-06-01T10:00:00Z",
    softwareVersion: "0.1.0",
    source: "by hand",
    rig: "Ribbon foil, bench 2",
    calibration: {},
    mounting: { yawDeg: 20, pitchDeg: 0, rollDeg: 0 },
    merits: { sigmaDeg: 0.2 },
    warnings: [],
  });
  const [asRecorded, newest] = [join(temporaryFolder(), "a"), join(temporaryFolder(), "b")];
  await bendwatch("export", trial, "--to", asRecorded);
  await bendwatch("export", trial, "--to", newest, "--calibration", "newest");
  expect(fingerprints(newest)["midline.csv"]).not.toBe(fingerprints(asRecorded)["midline.csv"]);
});

test("what cannot be found is refused with the reason, exit code 1, and nothing is saved", async () => {
  const records = join(temporaryFolder(), "records");
  const rig = rigWith(records, false);
  const trial = await rehearse(rig, 6);
  const { code, out } = await bendwatch("calibrate", "--kind", "six-positions", "--trial", trial);
  expect(code).toBe(1);
  expect(out).toMatch(/S1: refused: 1 still poses, 6 are needed; missing: x up/);
  expect(loadRig(rig).recordsUsed).toEqual([]);
});

test("live, from a serial port, one sensor's bias at rest", async () => {
  const records = join(temporaryFolder(), "records");
  const rigPath = rigWith(records, false);
  const pty = await openPty();
  onTestFinished(() => pty.close());
  const source = new RehearsalSource({ rig: loadRig(rigPath), swimmer: { restS: 1e6 }, rate: 8 });
  onTestFinished(() => source.stop());
  let writing: Promise<void> = Promise.resolve();
  const running = bendwatch(
    "calibrate",
    "--kind",
    "rest",
    "--rig",
    rigPath,
    "--port",
    pty.path,
    "--sensor",
    "S3",
  );
  void source.run({
    bytes(chunk) {
      const sent = chunk.slice();
      writing = writing.then(() => pty.write(sent)).catch(() => {});
    },
    linkState() {},
    mark() {},
  });
  const { code, out } = await running;
  expect(code).toBe(0);
  expect(out).toMatch(/S3: gyroscope bias .* °\/s/);
  expect(out).not.toMatch(/S2:/);
  const saved = JSON.parse(readFileSync(/saved as (.*)/.exec(out)![1]!, "utf8"));
  expect(saved).toMatchObject({ serial: "U3", kind: "rest", rig: "Ribbon foil, bench 2" });
  expect(saved.merits.sigmaDegPerS).toBeLessThan(0.01);
});

test.each([
  [["calibrate"], /required option '--kind/],
  [["calibrate", "--kind", "rest"], /neither --rig nor --trial/],
  [
    ["calibrate", "--kind", "rest", "--rig", "ribbon-foil", "--sensor", "S9", "--port", "/dev/none"],
    /one of S1, S2/,
  ],
  [["calibrate", "--kind", "mounting", "--rig", "ribbon-foil", "--pose", "up"], /expected pitch,roll/],
])("%j is refused with a reason, exit code 2", async (args, reason) => {
  const { code, err } = await bendwatch(...args);
  expect(code).toBe(2);
  expect(err).toMatch(reason);
});
