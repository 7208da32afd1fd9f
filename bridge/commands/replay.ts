/** bendwatch replay: watch a recorded trial as if it were live. */
import type { Command } from "commander";
import { readManifest } from "../trial/manifest.ts";
import { TrialSource } from "../trial/trial-source.ts";
import { loadCamera } from "./camera.ts";
import {
  type CalibrationChoice,
  calibratedRig,
  inWater,
  replayRate,
  type ServeOptions,
  type WaterOptions,
  withCalibrationOption,
  withServeOptions,
  withWaterOptions,
} from "./options.ts";
import { trialFolder } from "./places.ts";
import { watch } from "./watch.ts";

interface ReplayCommandOptions extends ServeOptions, WaterOptions {
  rate: number | "max";
  loop: boolean;
  calibration: CalibrationChoice;
  camera?: string;
}

export function addReplay(program: Command): void {
  withServeOptions(
    withWaterOptions(
      withCalibrationOption(
        program
          .command("replay")
          .description("Watch a recorded trial.")
          .argument("<trial>", "by name under recordings/ or by path")
          .option(
            "--rate <times>",
            "1 as recorded, 4 four times as fast, max as fast as it goes",
            replayRate,
            1,
          )
          .option("--loop", "start over at the end", false)
          .option(
            "--camera <file>",
            "table of a camera's midlines to compare with; see recordings/README.md",
          ),
      ),
    ),
  ).action(runReplay);
}

async function runReplay(trial: string, options: ReplayCommandOptions): Promise<void> {
  const folder = trialFolder(trial);
  const manifest = readManifest(folder);
  let startOver = () => {};
  const source = new TrialSource(folder, {
    rate: options.rate,
    loop: options.loop,
    onLoop: () => startOver(),
  });
  const startedAt = new Date(manifest.startedAt);
  const camera =
    options.camera === undefined ? undefined : (await loadCamera(options.camera, folder, manifest)).track;
  await watch(
    {
      rig: inWater(calibratedRig(manifest.rig, options.calibration), options),
      source,
      recorder: null,
      startedAt,
      camera,
    },
    options,
    (monitor) => {
      startOver = () => monitor.startOver();
    },
  );
}
