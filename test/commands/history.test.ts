/** bendwatch history as a user runs it, on rehearsed trials over weeks. */
import { cpSync, mkdirSync, readFileSync, rmSync, truncateSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { beforeAll, describe, expect, test } from "vitest";
import { computeHealth, HEALTH_FILE, sealOf, trialHealth } from "../../bridge/commands/trial-health.ts";
import { FIRST_MS, recordTrial, WEEK_MS } from "../history/trials.ts";
import { bendwatch } from "../support/bridge-process.ts";
import { fingerprints, temporaryFolder } from "../support/folders.ts";

/** Six weeks in which the bias of S2 grows by 0.3 °/s a week; from the third on a calibration takes it off. */
const weeks = temporaryFolder();
const name = (week: number) => `week-${week}`;

beforeAll(async () => {
  for (let week = 0; week < 6; week++) {
    await recordTrial(weeks, name(week), {
      startMs: FIRST_MS + week * WEEK_MS,
      biasDegPerS: { S2: 0.3 * week },
      calibrated: week >= 3,
    });
  }
});

/** A copy of the weeks' first trial to be spoiled, in a folder of its own. */
function copied(as = "trial"): { folder: string; trial: string } {
  const folder = temporaryFolder();
  const trial = join(folder, as);
  cpSync(join(weeks, name(0)), trial, { recursive: true });
  rmSync(join(trial, HEALTH_FILE), { force: true });
  return { folder, trial };
}

describe("a bias that grows over trials", () => {
  test("is told of the right sensor before it leaves its limit, and of no other, though a calibration hides it", async () => {
    const picture = join(temporaryFolder(), "history.svg");
    const { code, out, err } = await bendwatch("history", "--in", weeks, "--picture", picture);
    expect([code, err]).toEqual([0, ""]);
    const sensors = out.split("\n\n");
    expect(sensors).toHaveLength(6);
    const growing = sensors.find((text) => text.startsWith("Sensor F-2: S2 on Ribbon foil"))!;
    // 0.3 a week of one axis beside the others' constant bias.
    expect(growing).toMatch(
      /^◆ Gyro bias rises by 0\.2\d* °\/s a week and will leave its limit of 2\.17 about 2026-0[78]-\d\d if it goes on so\.$/m,
    );
    for (const text of sensors) if (text !== growing) expect(text).not.toMatch(/[◆■]/);
    expect(readFileSync(picture, "utf8").match(/will leave its limit/g)).toHaveLength(2);
  });

  test("one serial number asked for is one told, as JSON too", async () => {
    const { out } = await bendwatch("history", "F-2", "--in", weeks, "--json");
    const { sensors, leftAside } = JSON.parse(out);
    expect(leftAside).toEqual([]);
    expect(sensors).toHaveLength(1);
    expect(sensors[0].appearances.map(({ trial }: { trial: string }) => trial)).toEqual(
      [0, 1, 2, 3, 4, 5].map(name),
    );
    expect(sensors[0].figures.gyroBiasDegPerS.outlook.kind).toBe("leaving");
  });
});

describe("the figures of a trial", () => {
  test("are the same for the same bytes, and leave the recording as it was", () => {
    const { trial } = copied();
    const before = fingerprints(trial);
    const health = trialHealth(trial, sealOf(trial));
    expect(health).toEqual(computeHealth(join(weeks, name(0))));
    const { [HEALTH_FILE]: kept, ...recording } = fingerprints(trial);
    expect(kept).toBeDefined();
    expect(recording).toEqual(before);
  });

  test("are taken from health.json while seal and version are its own, and made anew otherwise", () => {
    const { trial } = copied();
    const path = join(trial, HEALTH_FILE);
    const seal = sealOf(trial);
    const health = trialHealth(trial, seal);
    const document = JSON.parse(readFileSync(path, "utf8"));
    const keep = (change: object) =>
      writeFileSync(path, JSON.stringify({ ...document, health: { ...health, rigName: "kept" }, ...change }));
    keep({});
    expect(trialHealth(trial, seal).rigName).toBe("kept");
    for (const stale of [{ seal: "0" }, { softwareVersion: "0" }, { formatVersion: 2 }, { health: {} }]) {
      keep(stale);
      expect(trialHealth(trial, seal)).toEqual(health);
      expect(JSON.parse(readFileSync(path, "utf8"))).toEqual(document);
    }
    writeFileSync(path, "{");
    expect(trialHealth(trial, seal)).toEqual(health);
  });
});

describe("what cannot be followed is said, and the rest goes on", () => {
  test("damaged, cut off, copied, without packets, without serial numbers, without rest", async () => {
    const { folder } = copied("a-whole");
    const packets = (trial: string) => join(folder, trial, "packets.cborseq");
    for (const other of ["b-cut", "c-changed", "d-copy", "e-empty"]) {
      cpSync(join(folder, "a-whole"), join(folder, other), { recursive: true });
    }
    truncateSync(packets("b-cut"), 20_000);
    const bytes = readFileSync(packets("c-changed"));
    bytes[bytes.length >> 1]! ^= 1;
    writeFileSync(packets("c-changed"), bytes);
    rmSync(packets("e-empty"));
    await recordTrial(folder, "f-restless", { startMs: FIRST_MS + WEEK_MS, restS: 0 });
    await recordTrial(folder, "g-nameless", {
      change: (rig) => ({
        ...rig,
        sensors: rig.sensors.map((sensor, i) => ({
          ...sensor,
          serial: ["", "F-9", "F-9"][i] ?? sensor.serial,
        })),
      }),
    });
    mkdirSync(join(folder, "no-trial"));
    writeFileSync(join(folder, "notes.txt"), "");
    const { code, out, err } = await bendwatch("history", "--in", folder);
    expect([code, err]).toEqual([0, ""]);
    expect(out).toMatch(/^Left aside: b-cut: .*bytes are gone from its end/m);
    expect(out).toMatch(/^Left aside: c-changed: .*changed since it was recorded/m);
    expect(out).toMatch(/^Left aside: d-copy: the same bytes as a-whole$/m);
    expect(out).toMatch(/^Left aside: e-empty: .*packets\.cborseq/m);
    expect(out).toMatch(/^Left aside: g-nameless: no serial number of its own: S1, S2, S3$/m);
    expect(out.match(/^Left aside/gm)).toHaveLength(5);
    expect(out).toMatch(/f-restless +none/);
    expect(out).toMatch(/^Sensor F-1: S1 on Ribbon foil, bench 2, 2 trials/m);
    expect(out).toMatch(/^ {2}Without rest, so without figures at rest: 1 of 2 trials\./m);
  });

  test("a folder without trials has no sensors", async () => {
    const { code, out } = await bendwatch("history", "--in", temporaryFolder());
    expect([code, out]).toEqual([0, "No sensor with a serial number in any trial.\n"]);
  });

  test.each([
    [["--in", "no-such-folder"], /^COMMAND_INVALID\n {2}--in: found ENOENT/],
    [["F-77", "--in", weeks], /serial numbers: found F-77; expected sensors of the trials in .*: F-1, F-2/],
    [["--in", weeks, "--picture", join("no-such-folder", "a.svg")], /^FILE_UNWRITABLE/],
  ])("%j is refused with a reason, exit code 2", async (args, reason) => {
    const { code, out, err } = await bendwatch("history", ...args);
    expect([code, out]).toEqual([2, ""]);
    expect(err).toMatch(reason);
  });
});
