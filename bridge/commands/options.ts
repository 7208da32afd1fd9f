/** Options that several commands share, and how their text becomes values. */
import { type Command, InvalidArgumentError } from "commander";

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

/** A multiple of real time, or "max". */
export function replayRate(text: string): number | "max" {
  return text === "max" ? "max" : positiveNumber(text);
}

/** For options given several times. */
export function collect(text: string, before: string[]): string[] {
  return [...before, text];
}
