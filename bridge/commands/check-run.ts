/** A release check joined to the pipeline that feeds it. */
import { createHash } from "node:crypto";
import { closeSync, openSync, readSync } from "node:fs";
import { join } from "node:path";
import { ReleaseCheck } from "../check/release-check.ts";
import { type CheckReport, type Recording, reportOf } from "../check/report.ts";
import { siteField } from "../health/site-field.ts";
import { createDecoder } from "../link/decoder.ts";
import { normalGravity } from "../numeric/gravity.ts";
import { STANDARD_GRAVITY } from "../numeric/units.ts";
import { Pipeline, type PipelineObserver } from "../pipeline.ts";
import type { Rig } from "../rig/load.ts";
import { PACKETS_FILE, readManifest } from "../trial/manifest.ts";
import { verifyTrial } from "../trial/verify.ts";
import { softwareVersion } from "../version.ts";
import type { CheckAction } from "../wire/check.ts";
import { runThrough } from "./run-through.ts";
import { IGNORE_PACKETS } from "./verify.ts";

export class CheckRun {
  readonly pipeline: Pipeline;
  readonly check: ReleaseCheck;

  /** @param onFlag is told of every flag, as the recorder wants it */
  constructor(rig: Rig, startedAt: Date, onFlag: NonNullable<PipelineObserver["flag"]> = () => {}) {
    const { sensors, models, hub, body, site, packetLayout } = rig;
    const fields = packetLayout?.packets.flatMap((packet) => packet.fields.map(({ what }) => what)) ?? [];
    this.pipeline = new Pipeline(rig, {
      startedAt,
      ring: false,
      observer: {
        sweep: (sweep) => this.check.sweep(sweep),
        status: (status, timeS) => this.check.status(status, timeS),
        flag: (flag, change) => {
          if (change === "raised") this.check.flag(flag);
          onFlag(flag, change);
        },
      },
    });
    this.check = new ReleaseCheck({
      sensors,
      models,
      rateHz: hub.rateHz,
      lengthM: body.lengthMm / 1000,
      limits: { ...rig.thresholds, ...rig.checkLimits },
      gravity: site ? normalGravity(site.latitudeDeg, site.heightM) : STANDARD_GRAVITY,
      fieldUT: site ? siteField(site, site.date ? new Date(site.date) : startedAt).normUT : null,
      hasStatus: hub.layout === "native" || fields.includes("supply") || fields.includes("temperature"),
      rest: () => this.pipeline.health.rest,
      readings: () => ({
        counters: this.pipeline.counters,
        clock: this.pipeline.clock.counters,
        driftPpm: this.pipeline.drift.ppm,
      }),
    });
  }

  act(action: CheckAction, hostTimeMs: number): void {
    this.check.act(action, this.pipeline.timeS, hostTimeMs);
  }
}

/**
 * The report of the check that a trial holds, worked out from its recording.
 * @throws BendwatchError TRIAL_UNREADABLE
 */
export function checkTrial(folder: string): CheckReport {
  const manifest = readManifest(folder);
  const run = new CheckRun(manifest.rig, new Date(manifest.startedAt));
  runThrough(folder, run.pipeline, (action, hostTimeMs) => run.act(action, hostTimeMs));
  const { problems } = verifyTrial(folder, (rig) => createDecoder(rig, IGNORE_PACKETS));
  const recording: Recording = {
    trial: manifest.name,
    startedAt: manifest.startedAt,
    softwareVersion: manifest.softwareVersion,
    origin: `${manifest.origin.kind}: ${manifest.origin.detail}`,
    notes: manifest.notes,
    ...fingerprint(join(folder, PACKETS_FILE)),
    problem: problems.length === 0 ? null : `the recording is not whole: ${problems.join("; ")}`,
  };
  return reportOf(run.check, manifest.rig, recording, softwareVersion);
}

/** Read piece by piece: a recording may be larger than memory. */
function fingerprint(path: string): { sha256: string; bytes: number } {
  const hash = createHash("sha256");
  const block = Buffer.alloc(2 ** 20);
  const file = openSync(path, "r");
  try {
    let bytes = 0;
    for (let read = readSync(file, block); read > 0; read = readSync(file, block)) {
      hash.update(block.subarray(0, read));
      bytes += read;
    }
    return { sha256: hash.digest("hex"), bytes };
  } finally {
    closeSync(file);
  }
}
