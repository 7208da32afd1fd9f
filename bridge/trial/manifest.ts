/**
 * trial.json, the manifest of a trial: when, with what software, where from, and the whole rig with its sensor models
 * and thresholds, so that a trial folder is complete in itself and reads the same after config/ has changed.
 */
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { z } from "zod";
import { BendwatchError } from "../errors.ts";
import { usedRecordSchema } from "../rig/calibration-record.ts";
import { checkLimitsSchema } from "../rig/check-limits.ts";
import { checkConfig, loadConfig, type Rig } from "../rig/load.ts";
import { packetLayoutSchema } from "../rig/packet-layout.ts";
import { rigSchema } from "../rig/rig.ts";
import { sensorModelSchema } from "../rig/sensor-model.ts";
import { thresholdsSchema } from "../rig/thresholds.ts";

export const MANIFEST_FILE = "trial.json";
export const PACKETS_FILE = "packets.cborseq";
export const SEALS_FILE = "seals.jsonl";
export const MARKS_FILE = "marks.jsonl";
export const FLAGS_FILE = "flags.jsonl";

const originSchema = z.strictObject({
  kind: z.enum(["live", "rehearsal", "import"]),
  detail: z.string().max(2000).describe("Port, rehearsed rig and faults, or imported file."),
});

const manifestSchema = z.strictObject({
  formatVersion: z.literal(1),
  softwareVersion: z.string().min(1),
  name: z.string().min(1).max(100),
  startedAt: z.iso.datetime({ offset: true }).describe("Host clock at the start."),
  origin: originSchema,
  notes: z.string().max(20_000).default(""),
  settings: z.record(z.string(), z.unknown()).default({}).describe("Options of the run that recorded it."),
  rig: z.looseObject({}),
});

const resolvedSchema = z.looseObject({
  models: z.array(sensorModelSchema),
  packetLayout: packetLayoutSchema.nullable().default(null),
  thresholds: z.record(z.string(), z.unknown()),
  checkLimits: z.record(z.string(), z.unknown()).default({}),
  recordsUsed: z.array(usedRecordSchema).default([]),
});

export type Origin = z.infer<typeof originSchema>;
export interface Manifest extends Omit<z.infer<typeof manifestSchema>, "rig"> {
  readonly rig: Rig;
}

/** Writes trial.json, which must not exist, through to the disk; returns its bytes. @throws the system's error */
export function writeManifest(folder: string, manifest: Manifest): Buffer {
  const bytes = Buffer.from(`${JSON.stringify(manifest, null, 2)}\n`);
  writeFileSync(join(folder, MANIFEST_FILE), bytes, { flag: "wx", flush: true });
  return bytes;
}

/**
 * Reads and checks trial.json. The rig passes the same checks as a rig file. Thresholds and limits that the recording
 * software did not know yet are taken from config/; those that only it knew are left out.
 * @throws BendwatchError TRIAL_UNREADABLE naming every key that is wrong
 */
export function readManifest(folder: string): Manifest {
  const path = join(folder, MANIFEST_FILE);
  let json: unknown;
  try {
    json = JSON.parse(readFileSync(path, "utf8"));
  } catch (cause) {
    throw new BendwatchError(
      "TRIAL_UNREADABLE",
      { where: path, found: (cause as Error).message, expected: "the manifest of a trial, as JSON" },
      { cause },
    );
  }
  try {
    const manifest = checkConfig(path, json, manifestSchema);
    return Object.freeze({ ...manifest, rig: checkRig(path, manifest.rig) });
  } catch (cause) {
    if (!(cause instanceof BendwatchError)) throw cause;
    throw new BendwatchError("TRIAL_UNREADABLE", cause.details, { cause });
  }
}

/** A rig as stored: the rig file's keys, models, layout and thresholds checked, whatever else was resolved kept. */
function checkRig(path: string, stored: Record<string, unknown>): Rig {
  const where = `${path}, rig`;
  const fileKeys = Object.keys(rigSchema.shape);
  const file = checkConfig(
    where,
    Object.fromEntries(Object.entries(stored).filter(([key]) => fileKeys.includes(key))),
    rigSchema,
  );
  const { models, packetLayout, recordsUsed, ...resolved } = checkConfig(where, stored, resolvedSchema);
  const known = <T extends object>(
    name: string,
    schema: z.ZodType<T>,
    limits: Record<string, unknown>,
  ): T => {
    const ours = Object.entries(loadConfig("", name, schema));
    return checkConfig(
      `${where}, ${name}`,
      Object.fromEntries(ours.map(([key, value]) => [key, limits[key] ?? value])),
      schema,
    );
  };
  const thresholds = known("thresholds", thresholdsSchema, resolved.thresholds);
  const checkLimits = known("check", checkLimitsSchema, resolved.checkLimits);
  if (models.length !== file.sensors.length) {
    throw new BendwatchError("TRIAL_UNREADABLE", {
      where: `${where}.models`,
      found: `${models.length} models`,
      expected: `one for each of the ${file.sensors.length} sensors`,
    });
  }
  return Object.freeze({ ...stored, ...file, models, packetLayout, thresholds, checkLimits, recordsUsed });
}
