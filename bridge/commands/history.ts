/** bendwatch history: what becomes of each sensor over its trials, so that a dying one is seen before it dies. */
import { existsSync, readdirSync, writeFileSync } from "node:fs";
import { basename, join } from "node:path";
import type { Command } from "commander";
import { BendwatchError } from "../errors.ts";
import { describeHistories, plain } from "../history/describe.ts";
import { historiesOf, type NamedTrial } from "../history/outlook.ts";
import { drawHistories } from "../history/picture.ts";
import { loadConfig } from "../rig/load.ts";
import { thresholdsSchema } from "../rig/thresholds.ts";
import { MANIFEST_FILE, PACKETS_FILE } from "../trial/manifest.ts";
import { recordingsFolder } from "./places.ts";
import { sealOf, trialHealth } from "./trial-health.ts";

interface HistoryOptions {
  in: string;
  json: boolean;
  picture?: string;
}

export function addHistory(program: Command): void {
  program
    .command("history")
    .description(
      "Follow each sensor over its trials: bias, noise, gravity, field, and what leaves its limit.",
    )
    .argument("[serials...]", "serial numbers; all if left out")
    .option("--in <folder>", "folder of the trials", recordingsFolder)
    .option("--json", "print everything as JSON", false)
    .option("--picture <file>", "draw bias, noise and field over time, as SVG")
    .action(runHistory);
}

function runHistory(serials: readonly string[], options: HistoryOptions): void {
  const { trials, leftAside } = readTrials(options.in);
  const { trendAheadDays } = loadConfig("", "thresholds", thresholdsSchema);
  const all = historiesOf(trials, trendAheadDays);
  const unknown = serials.filter((serial) => !all.some((history) => history.serial === serial));
  if (unknown.length > 0) {
    throw new BendwatchError("COMMAND_INVALID", {
      where: "serial numbers",
      found: unknown.map(plain).join(", "),
      expected: `sensors of the trials in ${options.in}: ${all.map(({ serial }) => plain(serial)).join(", ") || "there are none with a serial number"}`,
    });
  }
  const histories = all.filter(({ serial }) => serials.length === 0 || serials.includes(serial));
  if (options.picture !== undefined) writePicture(options.picture, drawHistories(histories, trendAheadDays));
  if (options.json) {
    console.log(JSON.stringify({ trendAheadDays, sensors: histories, leftAside }, null, 2));
    return;
  }
  const parts = [
    histories.length === 0 ? "No sensor with a serial number in any trial." : describeHistories(histories),
    leftAside.map((line) => `Left aside: ${plain(line)}`).join("\n"),
  ];
  console.log(parts.filter((part) => part !== "").join("\n\n"));
}

/** All trials that can be read, and a line on each that cannot, and on each sensor without a serial number of its own. */
function readTrials(folder: string): { trials: NamedTrial[]; leftAside: string[] } {
  const trials: NamedTrial[] = [];
  const leftAside: string[] = [];
  const bySeal = new Map<string, string>();
  for (const path of trialFolders(folder)) {
    const trial = basename(path);
    try {
      const seal = sealOf(path);
      const twin = bySeal.get(seal);
      if (twin === undefined) {
        bySeal.set(seal, trial);
        const { health, problem } = withOwnSerials(trialHealth(path, seal));
        trials.push({ trial, health });
        if (problem !== null) leftAside.push(`${trial}: ${problem}`);
      } else leftAside.push(`${trial}: the same bytes as ${twin}`);
    } catch (error) {
      leftAside.push(`${trial}: ${reasonOf(error)}`);
    }
  }
  return { trials, leftAside };
}

/** Folders that hold a manifest or packets, by name. @throws BendwatchError COMMAND_INVALID */
function trialFolders(folder: string): string[] {
  try {
    return readdirSync(folder)
      .sort()
      .map((name) => join(folder, name))
      .filter((path) => existsSync(join(path, MANIFEST_FILE)) || existsSync(join(path, PACKETS_FILE)));
  } catch (cause) {
    throw new BendwatchError(
      "COMMAND_INVALID",
      { where: "--in", found: (cause as Error).message, expected: "a folder of trials" },
      { cause },
    );
  }
}

/** A serial number that two sensors of one rig bear tells neither from the other. */
function withOwnSerials(health: NamedTrial["health"]): {
  health: NamedTrial["health"];
  problem: string | null;
} {
  const { sensors } = health;
  const own = sensors.filter(
    ({ serial }) => serial !== "" && sensors.filter((other) => other.serial === serial).length === 1,
  );
  if (own.length === sensors.length) return { health, problem: null };
  const names = sensors.filter((sensor) => !own.includes(sensor)).map(({ name }) => name);
  return {
    health: { ...health, sensors: own },
    problem: `no serial number of its own: ${names.join(", ")}`,
  };
}

/** In one line. */
function reasonOf(error: unknown): string {
  if (error instanceof BendwatchError)
    return error.details
      .map(({ where, found, expected }) => `${where}: found ${found}; expected ${expected}`)
      .join("; ");
  return (error as Error).message;
}

/** @throws BendwatchError FILE_UNWRITABLE */
function writePicture(path: string, picture: string): void {
  try {
    writeFileSync(path, picture);
  } catch (cause) {
    throw new BendwatchError(
      "FILE_UNWRITABLE",
      { where: path, found: (cause as Error).message, expected: "a file that can be written" },
      { cause },
    );
  }
}
