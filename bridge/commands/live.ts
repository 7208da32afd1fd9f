/** bendwatch live: watch and record a hub on a serial port. */
import { join } from "node:path";
import type { Command } from "commander";
import { BendwatchError } from "../errors.ts";
import { SerialSource } from "../link/serial-source.ts";
import { loadRig, type Rig } from "../rig/load.ts";
import { nextTrialName } from "../trial/names.ts";
import { TrialRecorder } from "../trial/recorder.ts";
import { softwareVersion } from "../version.ts";
import {
  inWater,
  type ServeOptions,
  type WaterOptions,
  withServeOptions,
  withWaterOptions,
} from "./options.ts";
import { recordingsFolder, trialFolder } from "./places.ts";
import { watch } from "./watch.ts";

interface LiveOptions extends ServeOptions, WaterOptions {
  rig: string;
  port?: string;
  usbSerial?: string;
  /** A name, or false for --no-record. */
  record: string | false | true;
  notes: string;
}

export function addLive(program: Command): void {
  withServeOptions(
    withWaterOptions(
      program
        .command("live")
        .description("Watch the hub on a serial port, and record from the first byte.")
        .requiredOption("--rig <name>", "rig file, by name under config/rigs or by path")
        .option("--port <path>", "serial port, instead of the rig file's")
        .option("--usb-serial <number>", "serial port by its adapter's USB serial number")
        .option("--record <trial>", "name of the trial; made from the date if left out")
        .option("--no-record", "watch without recording")
        .option("--notes <text>", "kept with the trial", ""),
    ),
  ).action(runLive);
}

async function runLive(options: LiveOptions): Promise<void> {
  const rig = inWater(loadRig(options.rig), options);
  const startedAt = new Date();
  const source = new SerialSource({ port: portOf(options, rig), baudRate: rig.hub.baudRate });
  const recorder = options.record === false ? null : await record(options, rig, startedAt, source.label);
  await watch({ rig, source, recorder, startedAt }, options);
}

function record(options: LiveOptions, rig: Rig, startedAt: Date, detail: string): Promise<TrialRecorder> {
  const folder =
    typeof options.record === "string"
      ? trialFolder(options.record)
      : join(recordingsFolder, nextTrialName(recordingsFolder, startedAt));
  const origin = { kind: "live" as const, detail };
  return TrialRecorder.create({ folder, rig, origin, softwareVersion, startedAt, notes: options.notes });
}

/** The serial port that the options name, or else the rig file. @throws BendwatchError PORT_NOT_FOUND */
export function portOf(options: { port?: string; usbSerial?: string }, rig: Rig) {
  if (options.usbSerial !== undefined) return { usbSerialNumber: options.usbSerial };
  if (options.port !== undefined) return { path: options.port };
  if (rig.hub.port !== undefined) return rig.hub.port;
  throw new BendwatchError("PORT_NOT_FOUND", {
    where: `rig ${rig.name}, hub.port`,
    found: "nothing",
    expected: "a port by path or USB serial number, here or as --port",
  });
}
