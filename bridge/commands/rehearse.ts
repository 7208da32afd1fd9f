/** bendwatch rehearse: a simulated swimmer and hub, for practice, demonstrations and tests. */
import type { Command } from "commander";
import { Option } from "commander";
import { FAULT_KINDS } from "../rehearsal/faults.ts";
import { RehearsalSource } from "../rehearsal/rehearsal-source.ts";
import { loadRig } from "../rig/load.ts";
import { TrialRecorder } from "../trial/recorder.ts";
import { softwareVersion } from "../version.ts";
import {
  collect,
  finiteNumber,
  inWater,
  positiveNumber,
  replayRate,
  type ServeOptions,
  type WaterOptions,
  wholeNumber,
  withServeOptions,
  withWaterOptions,
} from "./options.ts";
import { trialFolder } from "./places.ts";
import { recordOnly } from "./record-only.ts";
import { watch } from "./watch.ts";

interface RehearseOptions extends ServeOptions, WaterOptions {
  rig: string;
  fault: string[];
  gait: "carangiform" | "anguilliform";
  frequency: number;
  driveLag: number;
  cameraRate?: number;
  seed: number;
  seconds?: number;
  rate: number | "max";
  record?: string;
  notes: string;
  dashboard: boolean;
}

export function addRehearse(program: Command): void {
  const faults = Object.entries(FAULT_KINDS).map(
    ([kind, { of, does }]) => `  ${faultForm(kind, of)}  ${does}`,
  );
  withServeOptions(
    withWaterOptions(
      program
        .command("rehearse")
        .description("Watch a simulated swimmer through real packets, with faults on request.")
        .requiredOption("--rig <name>", "rig file, by name under config/rigs or by path")
        .option("--fault <fault>", "a fault, see below; may be given several times", collect, [])
        .addOption(
          new Option("--gait <name>", "how the body swims")
            .choices(["carangiform", "anguilliform"])
            .default("carangiform"),
        )
        .option("--frequency <hz>", "tailbeats a second", positiveNumber, 1.1)
        .option(
          "--drive-lag <ms>",
          "how long the body follows after its drive, ms; may be negative",
          finiteNumber,
          0,
        )
        .option("--camera-rate <hz>", "camera frame pulses a second; none if left out", positiveNumber)
        .option("--seed <number>", "of the noise; the same seed gives the same bytes", wholeNumber, 1)
        .option("--seconds <number>", "end after this long", positiveNumber)
        .option("--rate <times>", "1 real time, 4 four times as fast, max as fast as it goes", replayRate, 1)
        .option("--record <trial>", "keep it as a trial")
        .option("--notes <text>", "kept with the trial", "")
        .option("--no-dashboard", "only record; needs --record and --seconds"),
    ),
  )
    .addHelpText("after", `\nFaults (start and duration in seconds):\n${faults.join("\n")}`)
    .action(runRehearse);
}

async function runRehearse(options: RehearseOptions): Promise<void> {
  const rig = inWater(loadRig(options.rig), options);
  const startedAt = new Date();
  const source = new RehearsalSource({
    rig,
    seed: options.seed,
    faults: options.fault,
    swimmer: { gait: options.gait, frequencyHz: options.frequency },
    driveLagS: options.driveLag / 1000,
    ...(options.cameraRate === undefined ? {} : { syncHz: options.cameraRate }),
    rate: options.rate,
    startMs: startedAt.getTime(),
    ...(options.seconds === undefined ? {} : { durationS: options.seconds }),
  });
  const recorder =
    options.record === undefined
      ? null
      : await TrialRecorder.create({
          folder: trialFolder(options.record),
          rig,
          origin: { kind: "rehearsal", detail: [source.label, ...options.fault].join(", ") },
          softwareVersion,
          startedAt,
          notes: options.notes,
          settings: {
            gait: options.gait,
            frequencyHz: options.frequency,
            driveLagMs: options.driveLag,
            seed: options.seed,
            faults: options.fault,
          },
        });
  if (options.dashboard) await watch({ rig, source, recorder, startedAt }, options);
  else {
    const sweeps = await recordOnly({ rig, source, recorder, startedAt, seconds: options.seconds });
    console.log(`${sweeps} sweeps recorded as ${options.record}`);
  }
}

function faultForm(kind: string, of: "rig" | "sensor" | "axis"): string {
  const target = of === "rig" ? "" : of === "sensor" ? ":SENSOR" : ":SENSOR.AXIS";
  return `${kind}${target}@START+DURATION`.padEnd(38);
}
