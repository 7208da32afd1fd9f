import { createHash } from "node:crypto";
import { existsSync, readdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { parse } from "csv-parse/sync";
import { describe, expect, test } from "vitest";
import { temporaryFolder } from "../fixtures.ts";
import { createWriter, exported, rig, SENSORS, summary, writeAll, writeSweeps } from "./sample-export.ts";

const table = (folder: string, name: string): Record<string, string>[] =>
  parse(readFileSync(join(folder, `${name}.csv`)), { columns: true });
const json = (folder: string, name: string) => JSON.parse(readFileSync(join(folder, name), "utf8"));

describe("tables", () => {
  test("midline has a row a sweep and 41 stations in mm", () => {
    const rows = table(exported(), "midline");
    expect(rows).toHaveLength(20);
    expect(Object.keys(rows[0]!)).toHaveLength(1 + 3 * 41);
    expect(rows[10]).toMatchObject({
      time_s: "0.100000",
      x_mm_000: "0.000",
      x_mm_040: "-640.000",
      y_mm_040: "40.000",
      z_mm_040: "0.000",
    });
  });

  test("sensors has a row a sensor and sweep, with angles, trust in words, and what was bridged", () => {
    const rows = table(exported(), "sensors");
    expect(rows).toHaveLength(20 * SENSORS);
    expect(rows[SENSORS + 1]).toEqual({
      time_s: "0.010000",
      sensor: "S2",
      qw: "0.7071068",
      qx: "0.0000000",
      qy: "0.0000000",
      qz: "0.7071068",
      yaw_deg: "90.000",
      pitch_deg: "0.000",
      roll_deg: "0.000",
      trust: "heading unaided",
      bridged: "0",
    });
    expect(rows[2]).toMatchObject({ trust: "good", bridged: "1" });
  });

  test("flags holds each flag once, as it was last, in the order they were raised", () => {
    expect(table(exported(), "flags")).toEqual([
      {
        kind: "link silent",
        sensor: "",
        severity: "caution",
        start_s: "0.050000",
        end_s: "",
        detail: "'=gone, 0.4 s",
      },
      {
        kind: "low headroom",
        sensor: "S4",
        severity: "alarm",
        start_s: "0.050000",
        end_s: "0.150000",
        detail: "7 % left on y",
      },
    ]);
  });

  test("gait has a row a cycle, in the units of the column names", () => {
    const [good, still] = table(exported(), "gait");
    expect(good).toEqual({
      cycle: "1",
      start_s: "0.020000",
      end_s: "0.145000",
      frequency_hz: "8.0000",
      tail_amplitude_mm: "45.123",
      head_amplitude_mm: "12.800",
      phase_lag_deg: "180.000",
      wavelength_mm: "600.000",
      wave_speed_m_per_s: "4.8000",
      travelling_index: "0.7500",
      mean_bend_deg: "-2.000",
      strouhal_number: "0.3000",
      slip_ratio: "0.2500",
      reynolds_number: "812346",
      tail_amplitude_percent_of_length: "7.051",
      head_amplitude_percent_of_length: "2.000",
      frequency_cv: "0.01000",
      tail_amplitude_cv: "",
      wave_speed_cv: "",
      quality: "",
    });
    expect(still).toMatchObject({
      cycle: "2",
      phase_lag_deg: "",
      strouhal_number: "",
      wavelength_mm: "600.000",
    });
    expect(still!.quality).toBe(
      "bridged: phase_lag_deg; below noise: head_amplitude_mm phase_lag_deg; no flow speed: strouhal_number",
    );
  });

  test("envelope has half the amplitude at every station", () => {
    const rows = table(exported(), "envelope");
    expect(rows.map(({ cycle }) => cycle)).toEqual(["1", "2"]);
    expect(rows[0]).toMatchObject({ half_amplitude_mm_000: "0.000", half_amplitude_mm_040: "20.000" });
  });

  test("bouts has means and scatter; nothing where no number is to be trusted", () => {
    expect(table(exported(), "bouts")).toMatchObject([
      {
        bout: "1",
        start_s: "0.020000",
        end_s: "0.270000",
        cycles: "2",
        frequency_mean_hz: "8.0000",
        frequency_sd_hz: "0.1414",
        tail_amplitude_mean_mm: "",
      },
    ]);
  });

  test("marks and sync hold what was told", () => {
    const folder = exported();
    expect(table(folder, "marks")).toEqual([{ time_s: "0.100000", text: 'said "go"', from: "operator" }]);
    expect(table(folder, "sync")).toEqual([
      { time_s: "0.030000", edge: "17" },
      { time_s: "0.500000", edge: "18" },
    ]);
  });

  test("frames has the midline of each pulse, empty where no sweeps are around", () => {
    const rows = table(exported(), "frames");
    expect(rows).toHaveLength(2);
    expect(rows[0]).toMatchObject({ edge: "17", x_mm_040: "-640.000", y_mm_040: "12.000" });
    expect(rows[1]).toMatchObject({ time_s: "0.500000", edge: "18", x_mm_000: "", z_mm_040: "" });
  });

  test("reference and drive are in degrees, mm and ms, with empty cells for what is not known", () => {
    const folder = exported();
    expect(table(folder, "reference")).toEqual([
      { time_s: "0.020000", yaw_deg: "30.000", sway_mm: "-4.100" },
      { time_s: "0.030000", yaw_deg: "", sway_mm: "0.000" },
    ]);
    expect(table(folder, "drive")).toEqual([
      {
        sensor: "S2",
        station: "0.2400",
        against: "yaw",
        gain: "0.9877",
        lag_ms: "12.346",
        rmse_deg: "0.573",
        rmse_lag_removed_deg: "0.115",
        rmse_mm: "",
        rmse_lag_removed_mm: "",
        r2: "0.9900",
      },
      {
        sensor: "",
        station: "1.0000",
        against: "sway",
        gain: "",
        lag_ms: "",
        rmse_deg: "",
        rmse_lag_removed_deg: "",
        rmse_mm: "10.000",
        rmse_lag_removed_mm: "2.000",
        r2: "0.9900",
      },
    ]);
    const { sensors } = json(folder, "summary.json").drive;
    expect(sensors).toHaveLength(1);
    expect(sensors[0]).toMatchObject({ station: 0.24, gain: 0.98765, r2: 0.99 });
  });

  test("a long trial is whole although it is written in pieces", () => {
    const folder = join(temporaryFolder(), "export");
    const writer = createWriter(folder);
    writeSweeps(writer, 2000);
    writer.finish(summary);
    const rows = table(folder, "midline");
    expect(rows).toHaveLength(2000);
    expect(rows[1999]!.time_s).toBe("19.990000");
  });

  test("without camera pulses there is no sync table", () => {
    const folder = join(temporaryFolder(), "export");
    createWriter(folder).finish(summary);
    expect(existsSync(join(folder, "sync.csv"))).toBe(false);
    expect(json(folder, "datapackage.json").resources.map((r: { name: string }) => r.name)).not.toContain(
      "sync",
    );
    expect(json(folder, "summary.json")).toMatchObject({ durationS: 0, meanRateHz: null });
  });
});

test("the summary tells durations, rates, counts, losses and flags by kind", () => {
  const read = json(exported(), "summary.json");
  expect(read).toMatchObject({
    trial: "Trial 7",
    softwareVersion: "0.1.0",
    durationS: 0.19,
    nominalRateHz: 100,
    gait: {
      cycles: 2,
      steady: {
        bouts: 1,
        cycles: 2,
        durationS: 0.25,
        numbers: {
          frequency_hz: { mean: 8, cycles: 2 },
          tail_amplitude_mm: { mean: null, standardDeviation: null, cycles: 0 },
        },
      },
    },
    counts: { sweeps: 20, tailbeats: 2, marks: 1, syncEdges: 2, referenceSweeps: 2, flags: 2 },
    lostSweeps: 5,
    lostShare: 0.2,
    flagsByKind: { "low headroom": 1, "link silent": 1 },
    packets: { good: 20 },
    settings: { heading: "magnetic" },
  });
  expect(read.meanRateHz).toBeCloseTo(100, 9);
  expect(read.rig.name).toBe(rig.name);
});

test("the same trial gives the same bytes", () => {
  const first = exported();
  const second = exported();
  expect(readdirSync(first)).toEqual(readdirSync(second));
  for (const name of readdirSync(first)) {
    expect(readFileSync(join(first, name)).equals(readFileSync(join(second, name)))).toBe(true);
  }
});

describe("the description", () => {
  test("lists every file there is, with the size and hash it has", () => {
    const folder = exported();
    const { resources } = json(folder, "datapackage.json");
    const paths = resources.map(({ path }: { path: string }) => path);
    expect([...paths, "datapackage.json"].sort()).toEqual(readdirSync(folder).sort());
    for (const { path, bytes, hash } of resources.filter((r: { format: string }) => r.format === "csv")) {
      const content = readFileSync(join(folder, path));
      expect(content.length).toBe(bytes);
      expect(`sha256:${createHash("sha256").update(content).digest("hex")}`).toBe(hash);
    }
  });

  test("names the columns as the files do, with type, unit and meaning", () => {
    const folder = exported();
    for (const { path, schema } of json(folder, "datapackage.json").resources) {
      if (schema === undefined) continue;
      const header = parse(readFileSync(join(folder, path)), { to: 1 })[0];
      expect(schema.fields.map(({ name }: { name: string }) => name)).toEqual(header);
      for (const field of schema.fields) {
        expect(field.description).not.toBe("");
        if (field.type === "number")
          expect(["s", "mm", "deg", "Hz", "m/s", "ms", "%", "1"]).toContain(field.unit);
      }
    }
  });
});

describe("the folder", () => {
  test("with other things in it is left alone, unless told to overwrite", () => {
    const folder = temporaryFolder();
    writeFileSync(join(folder, "thesis.txt"), "draft 9");
    expect(() => createWriter(folder)).toThrow(/EXPORT_FAILED/);
    expect(readdirSync(folder)).toEqual(["thesis.txt"]);
    writeAll(folder, true);
    expect(readFileSync(join(folder, "thesis.txt"), "utf8")).toBe("draft 9");
  });

  test("with somebody else's data package is left alone", () => {
    const folder = temporaryFolder();
    writeFileSync(join(folder, "datapackage.json"), '{"name":"tides","resources":[]}');
    expect(() => createWriter(folder)).toThrow(/EXPORT_FAILED/);
  });

  test("with an earlier export is replaced, tables that are no longer made too", () => {
    const folder = exported();
    const writer = createWriter(folder);
    expect(existsSync(join(folder, "datapackage.json"))).toBe(false);
    writer.finish(summary);
    expect(existsSync(join(folder, "sync.csv"))).toBe(false);
    expect(table(folder, "midline")).toEqual([]);
  });

  test("that cannot be made is told", () => {
    expect(() => createWriter("/dev/null/export")).toThrow(/EXPORT_FAILED/);
  });
});
