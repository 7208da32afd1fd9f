/**
 * Imports of real recordings. They are not part of the project; without them in ../shared/open-data these tests are
 * skipped and say so.
 *
 * Pendulum of three segments, one table each: A. Szczęsna, P. Skurowski, P. Pruszowski, D. Pęszor, M. Paszkuta,
 * K. Wojciechowski, Reference Data Set for Accuracy Evaluation of Orientation Estimation Algorithms for Inertial Motion
 * Capture Systems, ICCVG 2016. Single unit at 285.714 Hz: D. Laidig, M. Caruso, A. Cereatti, T. Seel, BROAD - A Benchmark
 * for Robust Inertial Orientation Estimation, Data 6(7):72, 2021, doi:10.3390/data6070072, CC BY 4.0.
 */
import { existsSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { describe, expect, test } from "vitest";
import { packageRoot } from "../../../bridge/paths.ts";
import { columnMapSchema } from "../../../bridge/rig/column-map.ts";
import { loadConfig, loadRig } from "../../../bridge/rig/load.ts";
import { imported, tableOf } from "./fixtures.ts";

const folder = join(packageRoot, "../shared/open-data");
const pendulum = join(folder, "pendulum");
const optical = join(folder, "optical-imu/02_undisturbed_slow_rotation_B.csv.gz");

function describeWith(path: string, name: string, body: () => void): void {
  if (!existsSync(path)) console.warn(`Skipped: "${name}", since ${path} is not there`);
  describe.skipIf(!existsSync(path))(name, body);
}

const load = (name: string) => ({ map: loadConfig("columns", name, columnMapSchema), rig: loadRig(name) });

describeWith(pendulum, "a pendulum of three segments", () => {
  const { map, rig } = load("three-segment-pendulum");
  const segments = (trial: string) =>
    [1, 2, 3].map((k) => join(pendulum, `Pendulum_${trial}_Segment_${k}.csv.gz`));

  // Counted with awk: rows whose nine cells differ from the row before (as text), all rows, for each segment; and the
  // distinct times of the three files together (sort -u).
  test.each([
    ["Test01b_Static", [4079, 4035, 3999], [12_704, 12_704, 12_704], 12_704],
    ["Test03_Trial1", [1373, 1346, 1351], [4199, 4199, 4202], 4202],
    ["Test05_Trial2", [1399, 1405, 1388], [4433, 4405, 4401], 4435],
    ["Test07_Trial1", [1173, 1182, 1171], [3684, 3682, 3682], 3696],
    ["Test08_Trial1", [1116, 1104, 1106], [3491, 3482, 3477], 3492],
  ])("%s becomes one import of three sensors", async (trial, readings, rows, sweepCount) => {
    const { summary, sweeps } = await imported(segments(trial), map, rig);
    expect(sweeps).toHaveLength(sweepCount);
    expect(summary.files.map((file) => file.rows)).toEqual(rows);
    expect(summary.sensors).toEqual(
      ["Upper", "Middle", "Lower"].map((name, s) => ({
        name,
        present: readings[s],
        held: rows[s]! - readings[s]!,
        lost: 0,
        absent: sweepCount - rows[s]!,
        without: { gyro: 0, accel: 0, mag: 0 },
      })),
    );
    expect(summary).toMatchObject({ sweeps: sweepCount, lostSweeps: 0, regular: false });
  });

  test("at rest the mounting turns each sensor's specific force along the body, to the pivot", async () => {
    const { sweeps } = await imported(segments("Test01b_Static"), map, rig);
    rig.sensors.forEach(({ mounting }, s) => {
      const yaw = (mounting.yawDeg * Math.PI) / 180;
      const pitch = (mounting.pitchDeg * Math.PI) / 180;
      // Body x in sensor axes: the first row of Rz(yaw) Ry(pitch).
      const bodyX = [Math.cos(yaw) * Math.cos(pitch), -Math.sin(yaw), Math.cos(yaw) * Math.sin(pitch)];
      const mean = [0, 1, 2].map((axis) => sweeps.reduce((sum, { raw }) => sum + raw[s * 9 + 3 + axis]!, 0));
      const cosine = bodyX.reduce((sum, x, axis) => sum + x * mean[axis]!, 0) / Math.hypot(...mean);
      // Angles in the rig file are rounded to 0.1°, two of them: 0.05° times the square root of 2, and rounding up.
      expect((Math.acos(Math.min(1, cosine)) * 180) / Math.PI).toBeLessThan(0.1);
    });
  });
});

describeWith(optical, "a single unit at 285.714 Hz", () => {
  const { map, rig } = load("single-unit-optical");
  const lines = existsSync(optical) ? gunzipSync(readFileSync(optical)).toString().trimEnd().split("\n") : [];

  test("every value comes out as it stands in the table", async () => {
    const { sweeps, summary } = await imported([optical], map, rig);
    // wc and awk: 53 240 rows from 0 to 186.3365 s, all 3500 µs apart, no empty cell in the first ten columns.
    expect(summary).toMatchObject({
      sweeps: 53_240,
      lostSweeps: 0,
      regular: true,
      startS: 0,
      spanS: 186.3365,
    });
    expect(summary.rateHz).toBeCloseTo(1e6 / 3500, 9);
    expect(summary.sensors[0]).toMatchObject({ present: 53_240, held: 0, lost: 0, absent: 0 });
    expect(summary.files[0]!.ignored).toEqual(["ref_qw", "ref_qx", "ref_qy", "ref_qz", "movement"]);
    const wrong = sweeps.filter(({ raw, tickUs }, i) => {
      const cells = lines[i + 1]!.split(",").map(Number);
      return tickUs !== i * 3500 || raw.some((value, c) => value !== cells[c + 1]);
    });
    expect(wrong).toEqual([]);
  });

  test("rows taken out come back as sweeps lost, all of them", async () => {
    // Every 40th row and twenty rows from each 2000th on: 5 % less.
    const isLost = (i: number) => i > 0 && i < 53_239 && (i % 40 === 7 || i % 2000 < 20);
    const kept = lines.slice(1).filter((_, i) => !isLost(i));
    const { summary, sweeps } = await imported([tableOf([lines[0], ...kept].join("\n"))], map, rig);
    expect(summary).toMatchObject({ sweeps: kept.length, lostSweeps: 53_240 - kept.length, regular: true });
    expect(sweeps.at(-1)!.sequence).toBe(53_239);
  });
});
