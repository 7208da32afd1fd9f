/** A camera's midlines beside those of a rehearsed trial whose truth is known. */
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { beforeAll, describe, expect, test } from "vitest";
import { loadCamera } from "../../bridge/commands/camera.ts";
import { exportTrial } from "../../bridge/commands/export.ts";
import { recordOnly } from "../../bridge/commands/record-only.ts";
import type { BendwatchError } from "../../bridge/errors.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { readManifest } from "../../bridge/trial/manifest.ts";
import { TrialRecorder } from "../../bridge/trial/recorder.ts";
import { temporaryFolder } from "../support/folders.ts";
import { START_MS } from "../support/rehearse.ts";

const SECONDS = 20;
const CAMERA_HZ = 60;
const rig = loadRig("ribbon-foil");
const folder = join(temporaryFolder(), "trial");
const startedAt = new Date(START_MS);
const options = { rig, rate: "max", startMs: START_MS, durationS: SECONDS, syncHz: CAMERA_HZ } as const;
const source = new RehearsalSource(options);

beforeAll(async () => {
  const origin = { kind: "rehearsal", detail: source.label } as const;
  const recorder = await TrialRecorder.create({ folder, rig, origin, softwareVersion: "0", startedAt });
  await recordOnly({ rig, source, recorder, startedAt, seconds: SECONDS });
});

interface View {
  /** Camera axes, turned and shifted, in another unit. */
  readonly turn?: number;
  readonly scale?: number;
  readonly mirror?: boolean;
  /** How much later the camera says what it saw, s. */
  readonly lateS?: number;
  readonly firstFrame?: number;
}

/** What a camera saw of the true midline, frame by frame, from the first sweeps to the end. */
function tableOf({ turn = 0.7, scale = 1.1, mirror = false, lateS = 0, firstFrame = 0 }: View = {}): string {
  const header = Array.from({ length: 41 }, (_, i) =>
    ["x", "y"].map((axis) => `${axis}_mm_${String(i).padStart(3, "0")}`),
  );
  const lines = [`frame,${header.flat().join(",")}`];
  for (let frame = 0; frame < (SECONDS - 0.2) * CAMERA_HZ; frame++) {
    const { midline } = source.truthAt(frame / CAMERA_HZ - lateS);
    const cells = [frame + firstFrame];
    for (let i = 0; i < midline.length; i += 3) {
      const [x, y] = [midline[i]! * 1000 * scale + 340, midline[i + 1]! * 1000 * scale - 120];
      const across = Math.sin(turn) * x + Math.cos(turn) * y;
      cells.push(Math.cos(turn) * x - Math.sin(turn) * y, mirror ? -across : across);
    }
    lines.push(cells.join(","));
  }
  const file = join(temporaryFolder(), "camera.csv");
  writeFileSync(file, lines.join("\n"));
  return file;
}

const load = (view?: View) => loadCamera(tableOf(view), folder, readManifest(folder));

describe("a camera that sees the truth", () => {
  test("is laid upon the midline by turn and scale, and compared by station and overall in the export", async () => {
    const camera = await load();
    // Forty chords are shorter than the curve by less than a thousandth.
    expect(Math.abs(camera.track.scale * 1100 - 1)).toBeLessThan(0.001);
    // The midline's heading is that of noisy magnetometers: within some degrees.
    expect(Math.abs(camera.alignment.turn + 0.7)).toBeLessThan(0.05);
    const to = join(temporaryFolder(), "export");
    exportTrial(folder, readManifest(folder), to, false, camera);
    const rows: Record<string, string>[] = parse(readFileSync(join(to, "camera.csv")), { columns: true });
    expect(rows.map(({ station }) => station)).toEqual([
      ...Array.from({ length: 11 }, (_, k) => (k / 10).toFixed(4)),
      "",
    ]);
    const tail = rows[10]!;
    const overall = rows[11]!;
    for (const row of [tail, overall]) {
      // What interpolating between six sensors leaves of the tail's phase (5.6 ms, 2.2° of a beat) and amplitude (6 %),
      // twice over: of the midline, not of the comparison, which test/drive holds to 0.1 ms and 0.2 %.
      expect(Math.abs(Number(row.lag_ms))).toBeLessThan(11);
      expect(Math.abs(Number(row.gain) - 1)).toBeLessThan(0.12);
      expect(Number(row.r2)).toBeGreaterThan(0.98);
    }
    // The midline itself is held to 2 % of the body's length.
    expect(Number(overall.rmse_percent_length)).toBeLessThan(2);
    const summary = JSON.parse(readFileSync(join(to, "summary.json"), "utf8"));
    expect(summary.camera.rmseMm).toBeCloseTo(Number(overall.rmse_mm), 2);
    expect(summary.camera.frames).toBe(camera.frames);
  });

  test("and says so late, has the midline lead by as much", async () => {
    const lateS = 0.04;
    const [prompt, late] = await Promise.all([load(), load({ lateS })]);
    const lagMs = [prompt, late].map((camera) => {
      const to = join(temporaryFolder(), "export");
      exportTrial(folder, readManifest(folder), to, false, camera);
      return JSON.parse(readFileSync(join(to, "summary.json"), "utf8")).camera.lagMs as number;
    });
    expect(Math.abs(lagMs[0]! - lagMs[1]! - 1000 * lateS)).toBeLessThan(1);
  });
});

describe("refused with a reason:", () => {
  const refusal = (view: View) =>
    load(view).then(
      () => null,
      (error: BendwatchError) => [error.code, error.details[0]?.found],
    );

  test("a camera whose y counts downwards", async () => {
    expect(await refusal({ mirror: true })).toEqual([
      "TABLE_INVALID",
      "midlines that fit only when mirrored",
    ]);
  });

  test("frames that no pulse counts", async () => {
    const [code, found] = (await refusal({ firstFrame: 100_000 }))!;
    expect(code).toBe("TABLE_INVALID");
    expect(found).toMatch(/^1188 frames, 0 of them with a pulse among the trial's 1\d\d\d$/);
  });
});
