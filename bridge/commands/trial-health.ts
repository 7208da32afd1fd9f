/**
 * What a trial tells of its sensors, from its bytes: the trial runs through the pipeline as an export does. Kept beside the
 * recording as health.json, by the software's version and the seal of the bytes it was made from, and made anew when
 * either is another.
 */
import { closeSync, openSync, readFileSync, readSync, renameSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { z } from "zod";
import { mountingMatrix } from "../calibration/calibration.ts";
import { BendwatchError } from "../errors.ts";
import { allowedAtRest, GRAVITY_SPREAD } from "../health/at-rest.ts";
import { siteField } from "../health/site-field.ts";
import { type CollectedSensor, type Expected, HealthCollector } from "../history/collector.ts";
import { type TrialHealth, trialHealthSchema } from "../history/figures.ts";
import { createDecoder } from "../link/decoder.ts";
import { normalGravity } from "../numeric/gravity.ts";
import { DEG_PER_RAD, RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import { Pipeline } from "../pipeline.ts";
import type { Rig } from "../rig/load.ts";
import { MANIFEST_FILE, PACKETS_FILE, readManifest } from "../trial/manifest.ts";
import { manifestSeal, SealChain } from "../trial/seals.ts";
import { verifyTrial } from "../trial/verify.ts";
import { softwareVersion } from "../version.ts";
import { runThrough } from "./run-through.ts";
import { IGNORE_PACKETS } from "./verify.ts";

export const HEALTH_FILE = "health.json";
const BLOCK_BYTES = 2 ** 20;

const keptSchema = z.strictObject({
  formatVersion: z.literal(1),
  softwareVersion: z.string(),
  seal: z.string(),
  health: trialHealthSchema,
});

/** The seal of the whole recording as it is now: manifest and packets. @throws the system's error */
export function sealOf(folder: string): string {
  const chain = new SealChain(manifestSeal(readFileSync(join(folder, MANIFEST_FILE))));
  const file = openSync(join(folder, PACKETS_FILE), "r");
  try {
    const block = Buffer.allocUnsafe(BLOCK_BYTES);
    for (let read = readSync(file, block); read > 0; read = readSync(file, block))
      chain.update(block.subarray(0, read));
    return chain.seal().sha256;
  } finally {
    closeSync(file);
  }
}

/**
 * What is kept of the trial with this seal, or made anew and kept, where the folder can be written.
 * @throws BendwatchError TRIAL_UNREADABLE for a trial that is not whole
 */
export function trialHealth(folder: string, seal: string): TrialHealth {
  const path = join(folder, HEALTH_FILE);
  const kept = readKept(path);
  if (kept !== null && kept.softwareVersion === softwareVersion && kept.seal === seal) return kept.health;
  checkWhole(folder);
  const health = computeHealth(folder);
  const text = `${JSON.stringify({ formatVersion: 1, softwareVersion, seal, health }, null, 2)}\n`;
  try {
    // Renamed into place: a run that is broken off leaves no half a file of that name.
    writeFileSync(`${path}.part`, text);
    renameSync(`${path}.part`, path);
  } catch {
    // Recordings on a disk that is only read: worked out again next time.
  }
  return health;
}

function readKept(path: string): z.infer<typeof keptSchema> | null {
  try {
    return keptSchema.safeParse(JSON.parse(readFileSync(path, "utf8"))).data ?? null;
  } catch {
    return null;
  }
}

function checkWhole(folder: string): void {
  const { problems } = verifyTrial(folder, (rig: Rig) => createDecoder(rig, IGNORE_PACKETS));
  if (problems.length === 0) return;
  throw new BendwatchError("TRIAL_UNREADABLE", {
    where: folder,
    found: problems.join("; "),
    expected: "every byte as it was recorded",
  });
}

/** A function of the trial's bytes alone: the same bytes give the same figures. @throws BendwatchError TRIAL_UNREADABLE */
export function computeHealth(folder: string): TrialHealth {
  const { rig, startedAt } = readManifest(folder);
  const pipeline: Pipeline = new Pipeline(rig, {
    startedAt: new Date(startedAt),
    ring: false,
    observer: {
      sweep: (sweep) => collector.sweep(sweep),
      flag: (flag, change) => {
        if (change === "raised") collector.flag(flag);
      },
    },
  });
  const collector = new HealthCollector(collectedSensors(rig), pipeline.health);
  runThrough(folder, pipeline);
  return {
    startedAt,
    rigName: rig.name,
    durationS: Number(pipeline.timeS.toFixed(3)),
    flags: collector.rigFlags,
    sensors: collector.sensors(expectedAt(rig, new Date(startedAt))),
  };
}

function expectedAt({ site }: Rig, startedAt: Date): Expected {
  if (!site) return { gravityMPerS2: STANDARD_GRAVITY, fieldUT: null };
  return {
    gravityMPerS2: normalGravity(site.latitudeDeg, site.heightM),
    fieldUT: siteField(site, site.date ? new Date(site.date) : startedAt).normUT,
  };
}

/** The sensors with the limits that the detectors hold them to. */
function collectedSensors({ sensors, models, hub, thresholds, site }: Rig): CollectedSensor[] {
  return sensors.map((sensor, i) => {
    const model = models[i]!;
    const allowed = allowedAtRest({ ...sensor, model }, hub.rateHz);
    const bias = sensor.calibration.gyroBiasDegPerS.map((degrees) => degrees * RAD_PER_DEG);
    const noise = thresholds.restNoiseFactor;
    const wander = noise * allowed.instability * DEG_PER_RAD * 3600;
    const gravity = thresholds.restGravityShare * allowed.accelBias + (site ? 0 : GRAVITY_SPREAD);
    return {
      name: sensor.name,
      serial: sensor.serial,
      model: model.name,
      period: Math.max(1, hub.rateHz / (sensor.rateHz ?? hub.rateHz)),
      knownBias: mountingMatrix(sensor.mounting).map(
        (row) => row[0] * bias[0]! + row[1] * bias[1]! + row[2] * bias[2]!,
      ),
      limits: {
        gyroBiasDegPerS: thresholds.restGyroBiasShare * allowed.gyroBias * DEG_PER_RAD,
        gyroWanderDegPerH: Number.isFinite(wander) ? wander : null,
        gyroNoiseDegPerSPerSqrtHz: noise * allowed.gyroNoise * DEG_PER_RAD,
        accelNoiseMicroGPerSqrtHz: (noise * allowed.accelNoise * 1e6) / STANDARD_GRAVITY,
        gravityOffMilliG: (gravity * 1000) / STANDARD_GRAVITY,
        fieldOffPercent: allowed.hasMag ? 100 * thresholds.restFieldShare : null,
        lostPercent: 100 * thresholds.lostSamplesShare,
      },
    };
  });
}
