/** bendwatch calibrate: find a calibration's numbers, live or from a recorded trial, and keep them as records. */
import { type Command, InvalidArgumentError, Option } from "commander";
import type { BodyPose } from "../calibration/body-pose.ts";
import type { Progress } from "../calibration/procedure.ts";
import { Admission, HubClock } from "../clock/hub-clock.ts";
import { BendwatchError } from "../errors.ts";
import { createDecoder } from "../link/decoder.ts";
import { SerialSource } from "../link/serial-source.ts";
import type { ByteSource } from "../link/source.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import { recordsFolder, saveRecord } from "../rig/calibration-record.ts";
import { loadRig, type Rig } from "../rig/load.ts";
import type { Sweep } from "../sweep.ts";
import { readManifest } from "../trial/manifest.ts";
import { TrialSource } from "../trial/trial-source.ts";
import { softwareVersion } from "../version.ts";
import { type CalibrationKind, type CalibrationTask, TASKS } from "./calibrate-kinds.ts";
import { portOf } from "./live.ts";
import { collect, finiteNumber } from "./options.ts";
import { trialFolder } from "./places.ts";

interface CalibrateOptions {
  rig?: string;
  trial?: string;
  kind: CalibrationKind;
  port?: string;
  usbSerial?: string;
  sensor: string[];
  pose: BodyPose[];
  bend: boolean;
  bearing?: number;
  save: boolean;
}

/** Progress is shown so often, ms. */
const SHOW_MS = 200;

export function addCalibrate(program: Command): void {
  program
    .command("calibrate")
    .description(
      "Find biases, scales, irons or mountings, step by step, and keep them for the sensors' serial numbers.",
    )
    .option("--rig <name>", "rig file; the trial's own rig if left out with --trial")
    .addOption(
      new Option("--kind <kind>", "what to find")
        .choices(["rest", "six-positions", "turn-through", "mounting"])
        .makeOptionMandatory(),
    )
    .option("--trial <trial>", "from a recorded trial instead of a serial port")
    .option("--port <path>", "serial port, instead of the rig file's")
    .option("--usb-serial <number>", "serial port by its adapter's USB serial number")
    .option("--sensor <name>", "keep this sensor's result only; may be given several times", collect, [])
    .option(
      "--pose <pitch,roll>",
      "mounting: how the body is held straight, in degrees; nose up, right side down positive; may be given several times",
      (text: string, before: BodyPose[]) => [...before, parsePose(text)],
      [],
    )
    .option("--no-bend", "mounting: poses alone, no bend after them")
    .option("--bearing <degrees>", "mounting: compass bearing of the nose in the first pose", finiteNumber)
    .option("--no-save", "print the numbers only")
    .action(runCalibrate);
}

async function runCalibrate(options: CalibrateOptions): Promise<void> {
  const { rig, source, date } = whereFrom(options);
  const unknown = options.sensor.find((name) => !rig.sensors.some((sensor) => sensor.name === name));
  if (unknown !== undefined) {
    const names = rig.sensors.map((sensor) => sensor.name).join(", ");
    const detail = { where: "--sensor", found: `"${unknown}"`, expected: `one of ${names}` };
    throw new BendwatchError("COMMAND_INVALID", detail);
  }
  const poses = options.pose.length === 0 ? [{ pitch: 0, roll: 0 }] : options.pose;
  const bearing = options.bearing === undefined ? null : options.bearing * RAD_PER_DEG;
  const task = TASKS[options.kind]({ rig, date, poses, bend: options.bend, bearing });
  console.log(`Calibrating (${options.kind}) from ${source.label}. Ctrl-C ends it with what there is.`);
  await watchUntilDone(rig, source, task);
  if (!report(options, rig, source, date, task)) process.exitCode = 1;
}

/** @throws BendwatchError COMMAND_INVALID where neither rig nor trial is given */
function whereFrom(options: CalibrateOptions): { rig: Rig; source: ByteSource; date: Date } {
  if (options.trial !== undefined) {
    const folder = trialFolder(options.trial);
    const manifest = readManifest(folder);
    const rig = options.rig === undefined ? manifest.rig : loadRig(options.rig);
    const source = new TrialSource(folder, { rate: "max", loop: false });
    return { rig, source, date: new Date(manifest.startedAt) };
  }
  if (options.rig === undefined) {
    const detail = {
      where: "bendwatch calibrate",
      found: "neither --rig nor --trial",
      expected: "one of them",
    };
    throw new BendwatchError("COMMAND_INVALID", detail);
  }
  const rig = loadRig(options.rig);
  const source = new SerialSource({ port: portOf(options, rig), baudRate: rig.hub.baudRate });
  return { rig, source, date: new Date() };
}

/** Feeds the procedure until it has enough, the source ends, or Ctrl-C. */
async function watchUntilDone(rig: Rig, source: ByteSource, { procedure }: CalibrationTask): Promise<void> {
  const clock = new HubClock({ rateHz: rig.hub.rateHz });
  const ignore = () => {};
  const decoder = createDecoder(rig, {
    sweep(sweep: Sweep) {
      const admission = clock.admit(sweep);
      if (admission !== Admission.DUPLICATE && admission !== Admission.LATE) procedure.observe(sweep);
    },
    hello: ignore,
    status: ignore,
    reference: ignore,
    sync: ignore,
    button: ignore,
  });
  let shownMs = 0;
  let done = false;
  const stop = () => void source.stop();
  process.once("SIGINT", stop);
  try {
    await source.run({
      bytes(chunk, hostTimeMs) {
        if (done) return;
        decoder.push(chunk, hostTimeMs);
        // By the bytes' own times: a trial is read as fast as it goes and shows the same.
        if (hostTimeMs - shownMs < SHOW_MS) return;
        shownMs = hostTimeMs;
        const progress = procedure.progress();
        show(progress);
        done = progress.share >= 1;
        if (done) stop();
      },
      linkState(state, detail) {
        if (source.kind === "serial" && state !== "ended") console.log(`\n${detail}`);
      },
      mark: ignore,
    });
  } finally {
    process.off("SIGINT", stop);
  }
  if (process.stdout.isTTY) process.stdout.write("\n");
  if (decoder.complaint !== null) console.error(decoder.complaint);
}

let shown = "";

/** On a terminal one line that is rewritten; elsewhere a line whenever what to do changes. */
function show({ share, text }: Progress): void {
  if (process.stdout.isTTY) {
    process.stdout.write(`\r\x1b[K${`${Math.round(share * 100)}`.padStart(3)} %  ${text}`);
  } else if (text !== shown) console.log(text);
  shown = text;
}

/** Prints every sensor's outcome and saves what was found. @returns whether all that was asked for was found */
function report(
  { kind, sensor: asked, save }: CalibrateOptions,
  rig: Rig,
  source: ByteSource,
  date: Date,
  task: CalibrationTask,
): boolean {
  let whole = true;
  task.outcomes().forEach((outcome, i) => {
    const { name, serial } = rig.sensors[i]!;
    if (asked.length > 0 && !asked.includes(name)) return;
    if (!outcome.ok) {
      whole = false;
      console.log(`${name}: refused: ${outcome.reason}.`);
      return;
    }
    console.log(`${name}: ${outcome.text}`);
    for (const warning of outcome.warnings) console.log(`  ${warning}`);
    const { kept } = outcome;
    if (!save || serial === "") {
      const why = save ? "not saved, since the rig file gives no serial number; for the rig file: " : "";
      console.log(`  ${why}${JSON.stringify(kept.mounting ?? kept.calibration)}`);
      return;
    }
    const path = saveRecord(recordsFolder(rig.calibrations), {
      serial,
      kind,
      date: date.toISOString(),
      softwareVersion,
      source: source.label,
      rig: rig.name,
      ...kept,
      warnings: [...outcome.warnings],
    });
    console.log(`  saved as ${path}`);
  });
  return whole;
}

function parsePose(text: string): BodyPose {
  const [pitch, roll, ...more] = text.split(",").map(Number);
  if (pitch === undefined || roll === undefined || more.length > 0 || !Number.isFinite(pitch + roll)) {
    throw new InvalidArgumentError("expected pitch,roll in degrees, such as 0,-90 for its left side down.");
  }
  return { pitch: pitch * RAD_PER_DEG, roll: roll * RAD_PER_DEG };
}
