/** bendwatch export: a trial's tables, computed anew from its bytes. */
import { basename } from "node:path";
import type { Command } from "commander";
import { Pipeline } from "../pipeline.ts";
import type { CameraSummary } from "../trial/export/beside-tables.ts";
import { ExportWriter } from "../trial/export/export-writer.ts";
import { type Manifest, readManifest } from "../trial/manifest.ts";
import type { ReadEnd } from "../trial/reader.ts";
import { softwareVersion } from "../version.ts";
import { type Camera, loadCamera } from "./camera.ts";
import {
  type CalibrationChoice,
  calibratedRig,
  inWater,
  type WaterOptions,
  withCalibrationOption,
  withWaterOptions,
} from "./options.ts";
import { trialFolder } from "./places.ts";
import { runThrough } from "./run-through.ts";

interface ExportCommandOptions extends WaterOptions {
  to: string;
  overwrite: boolean;
  calibration: CalibrationChoice;
  camera?: string;
}

export function addExport(program: Command): void {
  withWaterOptions(
    withCalibrationOption(
      program
        .command("export")
        .description(
          "Write a trial's midline, sensors, flags, gait numbers, marks, camera frames and drive as CSV with datapackage.json.",
        )
        .argument("<trial>", "by name under recordings/ or by path")
        .requiredOption("--to <folder>", "folder for the tables")
        .option("--camera <file>", "table of a camera's midlines to compare with; see recordings/README.md")
        .option("--overwrite", "write into a folder that holds other files too", false),
    ),
  ).action(runExport);
}

async function runExport(trial: string, options: ExportCommandOptions): Promise<void> {
  const { to, overwrite, camera, calibration } = options;
  const folder = trialFolder(trial);
  const manifest = readManifest(folder);
  const rig = inWater(calibratedRig(manifest.rig, calibration), options);
  const seen = camera === undefined ? null : await loadCamera(camera, folder, manifest);
  const { sweeps, end } = exportTrial(folder, { ...manifest, rig }, to, overwrite, seen);
  console.log(`${sweeps} sweeps written to ${to}`);
  if (end !== null && end.kind !== "complete") {
    console.error(
      `The recording is ${end.kind}: what lies before is exported. Run bendwatch verify ${trial}`,
    );
  }
}

/** Writes the tables of a trial. The same bytes give the same files. */
export function exportTrial(
  folder: string,
  { rig, startedAt, notes, settings }: Manifest,
  to: string,
  overwrite = false,
  camera: Camera | null = null,
): { sweeps: number; end: ReadEnd | null } {
  const writer = new ExportWriter({
    folder: to,
    trialName: basename(folder),
    rig,
    softwareVersion,
    overwrite,
  });
  let lostSweeps = 0;
  const sweepsBy: Record<string, number> = {};
  const pipeline: Pipeline = new Pipeline(rig, {
    startedAt: new Date(startedAt),
    ring: false,
    camera: camera?.track,
    observer: {
      sweep(sweep) {
        const { timeS, lostBefore } = sweep;
        writer.readings(sweep);
        lostSweeps += lostBefore;
        const { midline, fusion } = pipeline;
        const { inUse, whySmooth } = midline;
        const by = whySmooth === null ? inUse : `${inUse}: ${whySmooth}`;
        sweepsBy[by] = (sweepsBy[by] ?? 0) + 1;
        writer.sweep(timeS, midline.positions, fusion.orientations, fusion.trust, fusion.bridged);
      },
      flag: (flag) => writer.flag(flag),
      beat: (cycle) => writer.beat(cycle),
      bout: (bout) => writer.bout(bout),
      mark: (mark) => writer.mark(mark),
      reference: (timeS, yaw, sway) => writer.reference(timeS, yaw, sway),
      sync: (timeS, edge) => writer.sync(timeS, edge),
    },
  });
  const { end, marks } = runThrough(folder, pipeline);
  for (const mark of marks) writer.mark(mark);
  const drive = pipeline.drive?.trial() ?? [];
  const { counters } = pipeline;
  const beside = camera === null ? null : besideCamera(camera, pipeline);
  writer.finish({ startedAt, notes, lostSweeps, sweepsBy, counters, drive, camera: beside, settings });
  return { sweeps: pipeline.sweepCount, end };
}

function besideCamera(
  { alignment, track, frames, leftOut }: Camera,
  { camera }: Pipeline,
): CameraSummary | null {
  if (camera === null) return null;
  const { scale } = track;
  return { stations: camera.stations(), overall: camera.overall(), alignment, scale, frames, leftOut };
}
