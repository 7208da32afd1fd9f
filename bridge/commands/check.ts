/**
 * bendwatch check: is the rig fit to release? Guided on the terminal, recorded, and judged from the recording alone; or
 * judged anew from a recording. Exit code 0 go, 2 no-go, 3 incomplete; 1 when it could not be done (main.ts).
 */
import { existsSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { type Command, InvalidArgumentError } from "commander";
import { checkPage } from "../check/page.ts";
import { type CheckReport, reportText } from "../check/report.ts";
import { BendwatchError } from "../errors.ts";
import { SerialSource } from "../link/serial-source.ts";
import type { ByteSource } from "../link/source.ts";
import { CHECK_SCRIPT, checkScript } from "../rehearsal/check-script.ts";
import { RehearsalSource } from "../rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../rig/load.ts";
import { nextTrialName } from "../trial/names.ts";
import { TrialRecorder } from "../trial/recorder.ts";
import { softwareVersion } from "../version.ts";
import { type CheckVerdict, MAX_OPERATOR_LENGTH } from "../wire/check.ts";
import { CheckGuide, operatorDeadline, rehearsedDeadline } from "./check-guide.ts";
import { CheckRun, checkTrial } from "./check-run.ts";
import { describeReport, listenToKeys, TerminalScreen } from "./check-screen.ts";
import { portOf } from "./live.ts";
import { collect, replayRate, wholeNumber } from "./options.ts";
import { recordingsFolder, trialFolder } from "./places.ts";

interface CheckOptions {
  rig?: string;
  port?: string;
  usbSerial?: string;
  operator: string;
  without: string[];
  record?: string;
  notes: string;
  rehearse: boolean;
  fault: string[];
  rate: number | "max";
  seed: number;
  to?: string;
}

const EXIT_CODES: Readonly<Record<CheckVerdict, number>> = { go: 0, "no-go": 2, incomplete: 3 };
const JSON_FILE = "report.json";
const PAGE_FILE = "report.html";
/** A rehearsed body lies still for so long after the script, so that the last steps can end, s. */
const AFTER_SCRIPT_S = 45;

export function addCheck(program: Command): void {
  program
    .command("check")
    .description(
      "Release check: seven steps, a verdict with its reasons, and a report. Or judge a recorded one anew.",
    )
    .argument("[trial]", "a recorded check, by name under recordings/ or by path")
    .option("--rig <name>", "check this rig now: rig file, by name under config/rigs or by path")
    .option("--port <path>", "serial port, instead of the rig file's")
    .option("--usb-serial <number>", "serial port by its adapter's USB serial number")
    .option("--operator <name>", "who does the check; stands in the report", operatorName, "")
    .option("--without <sensors>", "sensors taken out on purpose, with commas between", names, [])
    .option("--record <trial>", "name of the trial; made from the date if left out")
    .option("--notes <text>", "kept with the trial", "")
    .option("--rehearse", "with a simulated body that goes through the steps by itself", false)
    .option("--fault <fault>", "rehearsed fault, as bendwatch help rehearse lists them", collect, [])
    .option("--rate <times>", "of the rehearsal: 1 real time, max as fast as it goes", replayRate, 1)
    .option("--seed <number>", "of the rehearsal's noise", wholeNumber, 1)
    .option("--to <folder>", "of a recorded check: where the report goes, instead of the trial's folder")
    .addHelpText("after", "\nExit code: 0 go, 2 no-go, 3 incomplete, 1 when it could not be done.")
    .action(runCheck);
}

async function runCheck(trial: string | undefined, options: CheckOptions): Promise<void> {
  if ((trial === undefined) === (options.rig === undefined)) {
    throw new BendwatchError("COMMAND_INVALID", {
      where: "bendwatch check",
      found: trial === undefined ? "neither a trial nor --rig" : "both a trial and --rig",
      expected: "a recorded trial, or --rig for a check now",
    });
  }
  const folder = trial === undefined ? await checkNow(options) : trialFolder(trial);
  const report = checkTrial(folder);
  console.log(`\n${describeReport(report)}`);
  console.log(keep(report, folder, options.to));
  process.exitCode = EXIT_CODES[report.verdict];
}

/** Leads through the steps and records them. @returns the trial's folder */
async function checkNow(options: CheckOptions): Promise<string> {
  const rig = loadRig(options.rig!);
  const unknown = options.without.find((name) => !rig.sensors.some((sensor) => sensor.name === name));
  if (unknown !== undefined) {
    const expected = `one of ${rig.sensors.map(({ name }) => name).join(", ")}`;
    throw new BendwatchError("COMMAND_INVALID", { where: "--without", found: `"${unknown}"`, expected });
  }
  const startedAt = new Date();
  const source = sourceOf(options, rig, startedAt);
  const folder = trialFolder(
    options.record ?? join(recordingsFolder, nextTrialName(recordingsFolder, startedAt)),
  );
  const recorder = await TrialRecorder.create({
    folder,
    rig,
    origin: {
      kind: options.rehearse ? "rehearsal" : "live",
      detail: [source.label, ...options.fault].join(", "),
    },
    softwareVersion,
    startedAt,
    notes: options.notes,
    settings: { releaseCheck: true },
  });
  const run = new CheckRun(rig, startedAt, (flag) => recorder.flag(flag));
  const hasKeys = process.stdin.isTTY === true && process.stdout.isTTY === true;
  // A rehearsed body waits for nobody.
  const asks = hasKeys && !options.rehearse;
  const guide = new CheckGuide(
    {
      run,
      source,
      recorder,
      deadline: options.rehearse ? rehearsedDeadline(startedAt.getTime()) : operatorDeadline,
      screen: new TerminalScreen(rig, asks),
      asks,
    },
    startedAt.getTime(),
  );
  const stop = () => guide.stop();
  for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"] as const) process.once(signal, stop);
  const letGo = hasKeys ? listenToKeys(guide, () => run.check.underWay) : () => {};
  try {
    console.log(`Release check of ${rig.name}, ${source.label}. Recorded as ${recorder.name}.`);
    guide.prepare(options.operator, options.without);
    await guide.lead();
  } finally {
    letGo();
    for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"] as const) process.off(signal, stop);
    run.pipeline.finish();
    await recorder.close();
  }
  return folder;
}

function sourceOf(options: CheckOptions, rig: Rig, startedAt: Date): ByteSource {
  if (!options.rehearse) return new SerialSource({ port: portOf(options, rig), baudRate: rig.hub.baudRate });
  return new RehearsalSource({
    rig,
    seed: options.seed,
    faults: options.fault,
    swimmer: checkScript(),
    rate: options.rate,
    startMs: startedAt.getTime(),
    durationS: CHECK_SCRIPT.endS + AFTER_SCRIPT_S,
  });
}

/** Writes the report, and says how it compares with one that is there: that one is never overwritten by another. */
function keep(report: CheckReport, folder: string, to: string | undefined): string {
  const text = reportText(report);
  const stored = storedReport(folder);
  const agreement = stored === null ? "" : `${compare(text, stored)}\n`;
  if (to === undefined && stored !== null) return agreement.trimEnd();
  const target = to ?? folder;
  try {
    mkdirSync(target, { recursive: true });
    writeFileSync(join(target, JSON_FILE), text);
    writeFileSync(join(target, PAGE_FILE), checkPage(report));
  } catch (cause) {
    throw new BendwatchError(
      "FILE_UNWRITABLE",
      { where: target, found: (cause as Error).message, expected: "a folder that can be written" },
      { cause },
    );
  }
  return `${agreement}Report: ${join(target, PAGE_FILE)} and ${JSON_FILE}`;
}

function storedReport(folder: string): string | null {
  const path = join(folder, JSON_FILE);
  return existsSync(path) ? readFileSync(path, "utf8") : null;
}

/** Of a report worked out now and the one stored with the trial, both as texts. */
function compare(now: string, stored: string): string {
  if (now === stored) return "The stored report agrees, to the byte.";
  const [a, b] = [parsed(now), parsed(stored)];
  if (a !== null && b !== null && a.text === b.text) {
    return `The stored report agrees; it was worked out by version ${b.version}.`;
  }
  return `The stored report DIFFERS from what the recording says${b === null ? " and cannot be read" : `: it says ${b.verdict}`}. It was left as it is; --to writes this one elsewhere.`;
}

/** What is to agree whatever the version. */
function parsed(text: string): { text: string; version: string; verdict: string } | null {
  try {
    const { softwareVersion, ...rest } = JSON.parse(text) as CheckReport;
    return { text: JSON.stringify(rest), version: softwareVersion, verdict: rest.verdict };
  } catch {
    return null;
  }
}

function names(text: string): string[] {
  return text
    .split(",")
    .map((name) => name.trim())
    .filter((name) => name !== "");
}

function operatorName(text: string): string {
  if (text.length <= MAX_OPERATOR_LENGTH) return text;
  throw new InvalidArgumentError(`expected at most ${MAX_OPERATOR_LENGTH} characters.`);
}
