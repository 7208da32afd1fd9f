import { mkdirSync, readdirSync, writeFileSync } from "node:fs";
import { basename, dirname, join, relative } from "node:path";
import { expect, it } from "vitest";
import { applyRecords, type CalibrationRecord, saveRecord } from "../../bridge/rig/calibration-record.ts";
import { loadRig, withRecordsOfNow } from "../../bridge/rig/load.ts";
import { sensorSchema } from "../../bridge/rig/rig.ts";
import { temporaryFolder, writeRig } from "../support/folders.ts";

function record(changes: Partial<CalibrationRecord> = {}): CalibrationRecord {
  return {
    serial: "A1",
    kind: "rest",
    date: "2026-06-01T10:00:00.000Z",
    softwareVersion: "0.1.0",
    source: "trial x",
    rig: "Ribbon foil, bench 2",
    calibration: { gyroBiasDegPerS: [1, 2, 3] },
    merits: { sigmaDegPerS: 0.003 },
    warnings: [],
    ...changes,
  };
}

function sensor(extra: object = {}) {
  return sensorSchema.parse({ name: "S1", station: 0.1, model: "any", serial: "A1", ...extra });
}

it("the newest record of each kind counts, whatever the order they were saved in", () => {
  const folder = temporaryFolder();
  saveRecord(folder, record({ date: "2026-06-02T10:00:00Z", calibration: { gyroBiasDegPerS: [4, 5, 6] } }));
  saveRecord(folder, record());
  saveRecord(folder, record({ kind: "six-positions", calibration: { accelBiasMPerS2: [0.1, 0, 0] } }));
  const { sensors, used } = applyRecords([sensor({ calibration: { accelScale: [1, 2, 1] } })], folder, "any");
  expect(sensors[0]!.calibration).toMatchObject({
    gyroBiasDegPerS: [4, 5, 6],
    accelBiasMPerS2: [0.1, 0, 0],
    // What no record holds is the rig file's.
    accelScale: [1, 2, 1],
  });
  expect(used.map(({ sensor: name, file }) => [name, file]).sort()).toEqual([
    ["S1", "2026-06-01T10-00-00Z-six-positions.json"],
    ["S1", "2026-06-02T10-00-00Z-rest.json"],
  ]);
});

it("nothing is overwritten: a second one of the same date is added, and counts", () => {
  const folder = temporaryFolder();
  const first = saveRecord(folder, record());
  const second = saveRecord(folder, record({ calibration: { gyroBiasDegPerS: [7, 7, 7] } }));
  expect(dirname(first)).toBe(dirname(second));
  expect(readdirSync(dirname(first)).sort()).toEqual([basename(second), basename(first)].sort());
  expect(applyRecords([sensor()], folder, "any").sensors[0]!.calibration.gyroBiasDegPerS).toEqual([7, 7, 7]);
});

it("a sensor may name its records, or want none; one without serial number has none", () => {
  const folder = temporaryFolder();
  const name = basename(saveRecord(folder, record()), ".json");
  saveRecord(folder, record({ date: "2026-07-01T00:00:00Z", calibration: { gyroBiasDegPerS: [9, 9, 9] } }));
  const bias = (extra: object) =>
    applyRecords([sensor(extra)], folder, "any").sensors[0]!.calibration.gyroBiasDegPerS;
  expect(bias({ records: [name] })).toEqual([1, 2, 3]);
  expect(bias({ records: "none" })).toEqual([0, 0, 0]);
  expect(bias({ serial: "" })).toEqual([0, 0, 0]);
  expect(bias({ serial: "B2" })).toEqual([0, 0, 0]);
  expect(() => bias({ records: ["gone"] })).toThrow(/CONFIG_UNREADABLE/);
});

it("a mounting counts on its own rig alone", () => {
  const folder = temporaryFolder();
  const mounting = { yawDeg: 10, pitchDeg: 20, rollDeg: 30 };
  saveRecord(folder, record({ kind: "mounting", calibration: {}, mounting }));
  const on = (rig: string) => applyRecords([sensor()], folder, rig).sensors[0]!.mounting;
  expect(on("Ribbon foil, bench 2")).toEqual(mounting);
  expect(on("Another rig")).toEqual({ yawDeg: 0, pitchDeg: 0, rollDeg: 0 });
});

it.each(["../../elsewhere", "..", ".", "a/b\\c", "*?", "Ärmel 7"])(
  "a serial number %j stays within the folder",
  (serial) => {
    const folder = temporaryFolder();
    const path = saveRecord(folder, record({ serial }));
    expect(relative(folder, path).split("/")).toHaveLength(2);
    expect(relative(folder, path).startsWith("..")).toBe(false);
    expect(applyRecords([sensor({ serial })], folder, "any").used).toHaveLength(1);
  },
);

it("a record that is none is refused by name", () => {
  const folder = temporaryFolder();
  mkdirSync(join(folder, "A1"));
  writeFileSync(join(folder, "A1", "x.json"), JSON.stringify({ ...record(), kind: "guess", extra: 1 }));
  expect(() => applyRecords([sensor()], folder, "any")).toThrow(
    /CONFIG_INVALID[\s\S]*x\.json, kind[\s\S]*x\.json, extra/,
  );
});

it("a loaded rig has its records applied and listed, and can take newer ones later", () => {
  const folder = temporaryFolder();
  const path = writeRig("ribbon-foil", (rig) => {
    rig.calibrations = folder;
    rig.sensors[2]!.serial = "A1";
  });
  expect(loadRig(path).recordsUsed).toEqual([]);
  saveRecord(folder, record());
  const rig = loadRig(path);
  expect(rig.sensors[2]!.calibration.gyroBiasDegPerS).toEqual([1, 2, 3]);
  expect(rig.recordsUsed).toMatchObject([{ sensor: "S3", kind: "rest" }]);
  saveRecord(folder, record({ date: "2027-01-01T00:00:00Z", calibration: { gyroBiasDegPerS: [0, 0, 1] } }));
  expect(withRecordsOfNow(rig).sensors[2]!.calibration.gyroBiasDegPerS).toEqual([0, 0, 1]);
});
