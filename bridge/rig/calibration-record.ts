/**
 * Calibration records: what a calibration procedure found for one sensor, one JSON file each, by the sensor's serial number:
 *
 *     config/calibrations/<serial>/<date>-<kind>.json
 *
 * Records are added, never changed. A rig takes the newest of each kind for each of its sensors, or those its sensors
 * name; what a record holds takes the place of the rig file's own numbers.
 */
import { existsSync, mkdirSync, readdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { z } from "zod";
import { BendwatchError } from "../errors.ts";
import { packageRoot } from "../paths.ts";
import { definedOnly, loadConfig } from "./load-config.ts";
import { calibrationSchema, mountingSchema, type SensorPlace } from "./rig.ts";

const numbers = calibrationSchema.shape;

export const calibrationRecordSchema = z
  .strictObject({
    serial: z.string().min(1).max(64).describe("The sensor's serial number."),
    kind: z.enum(["rest", "six-positions", "turn-through", "mounting"]).describe("The procedure."),
    date: z.iso.datetime({ offset: true }).describe("When the readings were taken."),
    softwareVersion: z.string().min(1).describe("Of the software that worked it out."),
    source: z.string().max(2000).describe("Where the readings came from: port or trial."),
    rig: z.string().max(60).describe("Name of the rig; a mounting holds for this rig alone."),
    calibration: z
      .strictObject({
        gyroBiasDegPerS: numbers.gyroBiasDegPerS.unwrap().optional(),
        accelBiasMPerS2: numbers.accelBiasMPerS2.unwrap().optional(),
        accelScale: numbers.accelScale.unwrap().optional(),
        magHardIronUT: numbers.magHardIronUT.unwrap().optional(),
        magSoftIron: numbers.magSoftIron.unwrap().optional(),
      })
      .prefault({})
      .describe("What was found, as in a rig file's sensors[].calibration."),
    mounting: mountingSchema.optional().describe("What was found, as in a rig file's sensors[].mounting."),
    merits: z
      .record(z.string(), z.number())
      .describe("Figures of merit; units in their names, sigma a standard deviation."),
    warnings: z.array(z.string()).default([]).describe("What the procedure had to say."),
  })
  .describe("Found by `bendwatch calibrate`.");

export type CalibrationRecord = z.infer<typeof calibrationRecordSchema>;

/** A record that a rig's numbers come from; its file without folder. */
export const usedRecordSchema = calibrationRecordSchema
  .pick({ kind: true, date: true, merits: true })
  .extend({ sensor: z.string(), file: z.string() });
export type UsedRecord = z.infer<typeof usedRecordSchema>;

/** Folder of all records: the one the rig names, or config/calibrations. */
export function recordsFolder(named: string): string {
  return named === "" ? join(packageRoot, "config", "calibrations") : named;
}

/** Adds a record and returns its path; one of the same kind and date gets a number, nothing is overwritten. @throws BendwatchError FILE_UNWRITABLE */
export function saveRecord(folder: string, record: CalibrationRecord): string {
  const own = serialFolder(folder, record.serial);
  const stem = `${record.date.replaceAll(":", "-").replace(/\.\d+/, "")}-${record.kind}`;
  try {
    mkdirSync(own, { recursive: true });
    for (let copy = 1; ; copy++) {
      const path = join(own, `${stem}${copy === 1 ? "" : `-${copy}`}.json`);
      if (existsSync(path)) continue;
      writeFileSync(path, `${JSON.stringify(record, null, 2)}\n`, { flag: "wx" });
      return path;
    }
  } catch (cause) {
    throw new BendwatchError(
      "FILE_UNWRITABLE",
      { where: own, found: (cause as Error).message, expected: "a folder that can be written" },
      { cause },
    );
  }
}

/**
 * The sensors with what their records hold put in, and which records those were.
 * @param rigName mountings count only when they were found on this rig
 * @throws BendwatchError CONFIG_INVALID, CONFIG_UNREADABLE for a record that is none, or is named and not there
 */
export function applyRecords(
  sensors: readonly SensorPlace[],
  folder: string,
  rigName: string,
): { sensors: SensorPlace[]; used: UsedRecord[] } {
  const used: UsedRecord[] = [];
  const applied = sensors.map((sensor) => {
    let { calibration, mounting } = sensor;
    for (const { file, record } of chosen(sensor, folder, rigName)) {
      calibration = { ...calibration, ...definedOnly(record.calibration) };
      mounting = record.mounting ?? mounting;
      const { kind, date, merits } = record;
      used.push({ sensor: sensor.name, file, kind, date, merits });
    }
    return { ...sensor, calibration, mounting };
  });
  return { sensors: applied, used };
}

interface Found {
  readonly file: string;
  readonly record: CalibrationRecord;
}

/** The sensor's records that count: the newest of each kind, or those it names. */
function chosen({ serial, records }: SensorPlace, folder: string, rigName: string): Found[] {
  if (serial === "" || records === "none") return [];
  const own = serialFolder(folder, serial);
  const read = (file: string): Found => ({
    file,
    record: loadConfig("calibrations", join(own, file), calibrationRecordSchema),
  });
  if (records !== "newest") return records.map((name) => read(`${name}.json`));
  if (!existsSync(own)) return [];
  const newest = new Map<string, Found>();
  const all = readdirSync(own).filter((file) => file.endsWith(".json"));
  for (const found of all.sort(inOrder).map(read)) {
    const { kind, rig, date } = found.record;
    if (kind === "mounting" && rig !== rigName) continue;
    const before = newest.get(kind);
    if (before === undefined || Date.parse(date) >= Date.parse(before.record.date)) newest.set(kind, found);
  }
  return [...newest.values()];
}

/** Copies of one date in the order they were made. */
function inOrder(a: string, b: string): number {
  return a.length - b.length || (a < b ? -1 : 1);
}

/** A serial number is anything; as a folder's name it must not lead elsewhere. */
function serialFolder(folder: string, serial: string): string {
  return join(folder, encodeURIComponent(serial).replaceAll(".", "%2E").replaceAll("*", "%2A"));
}
