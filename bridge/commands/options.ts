/** Options that several commands share, and how their text becomes values. */
import { type Command, InvalidArgumentError, Option } from "commander";
import { type Rig, withRecordsOfNow } from "../rig/load.ts";

export interface ServeOptions {
  host: string;
  httpPort: number;
  token?: string;
}

/** Adds where the dashboard is served. */
export function withServeOptions(command: Command): Command {
  return command
    .option("--host <address>", "address to listen on; beyond this machine a token is needed", "127.0.0.1")
    .option("--http-port <number>", "port of the dashboard; 0 takes a free one", wholeNumber, 4270)
    .option("--token <text>", "what viewers must show, at least 12 characters");
}

/** What is measured on the day, and may differ from the rig file. */
export interface WaterOptions {
  flow?: number;
  waterTemperature?: number;
}

/** Adds the water's speed and temperature. */
export function withWaterOptions(command: Command): Command {
  return command
    .option("--flow <m/s>", "speed of the water past the body, instead of the rig's", within(0, 30))
    .option("--water-temperature <°C>", "instead of the rig's", within(-2, 45));
}

/** The rig in the water that the options tell of. */
export function inWater(rig: Rig, { flow, waterTemperature }: WaterOptions): Rig {
  const water = { ...rig.water };
  if (flow !== undefined) water.flowMPerS = flow;
  if (waterTemperature !== undefined) water.temperatureC = waterTemperature;
  return { ...rig, water };
}

function within(least: number, most: number): (text: string) => number {
  return (text) => {
    const value = text.trim() === "" ? Number.NaN : Number(text);
    if (value >= least && value <= most) return value;
    throw new InvalidArgumentError(`expected a number from ${least} to ${most}.`);
  };
}

export function wholeNumber(text: string): number {
  if (!/^\d+$/.test(text)) throw new InvalidArgumentError("expected a whole number, 0 or more.");
  return Number(text);
}

export function positiveNumber(text: string): number {
  const value = Number(text);
  if (!(value > 0)) throw new InvalidArgumentError("expected a number above 0.");
  return value;
}

/** Numbers with commas between them. */
export function numbers(text: string): number[] {
  const values = text.split(",").map((part) => (part.trim() === "" ? Number.NaN : Number(part)));
  if (!values.every(Number.isFinite))
    throw new InvalidArgumentError("expected numbers, with commas between.");
  return values;
}

export function finiteNumber(text: string): number {
  const value = Number(text);
  if (text.trim() === "" || !Number.isFinite(value)) throw new InvalidArgumentError("expected a number.");
  return value;
}

export type CalibrationChoice = "as-recorded" | "newest";

/** Adds whose calibration a recorded trial is worked out with. */
export function withCalibrationOption(command: Command): Command {
  return command.addOption(
    new Option("--calibration <choice>", "as-recorded, or the newest records of its sensors' serial numbers")
      .choices(["as-recorded", "newest"])
      .default("as-recorded"),
  );
}

/** The trial's rig with the calibration chosen. */
export function calibratedRig(rig: Rig, choice: CalibrationChoice): Rig {
  return choice === "newest" ? withRecordsOfNow(rig) : rig;
}

/** A multiple of real time, or "max". */
export function replayRate(text: string): number | "max" {
  return text === "max" ? "max" : positiveNumber(text);
}

/** For options given several times. */
export function collect(text: string, before: string[]): string[] {
  return [...before, text];
}
