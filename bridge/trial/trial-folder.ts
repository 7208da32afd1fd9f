/** Makes the folder of a new trial with its manifest in it. */
import { closeSync, fsyncSync, mkdirSync, openSync } from "node:fs";
import { dirname } from "node:path";
import { BendwatchError } from "../errors.ts";
import { type Manifest, writeManifest } from "./manifest.ts";

/**
 * Makes the folder, which must not exist, and writes trial.json.
 * @returns the bytes of trial.json
 * @throws BendwatchError TRIAL_EXISTS, TRIAL_UNWRITABLE
 */
export function createTrialFolder(folder: string, manifest: Manifest): Buffer {
  try {
    mkdirSync(dirname(folder), { recursive: true });
  } catch (cause) {
    throw unwritable(folder, cause as Error);
  }
  try {
    mkdirSync(folder);
    return writeManifest(folder, manifest);
  } catch (cause) {
    if ((cause as NodeJS.ErrnoException).code !== "EEXIST") throw unwritable(folder, cause as Error);
    throw new BendwatchError(
      "TRIAL_EXISTS",
      { where: folder, found: "something of that name", expected: "a name not taken yet" },
      { cause },
    );
  }
}

/** The error of a trial folder that cannot be written. */
export function unwritable(folder: string, cause: Error): BendwatchError {
  return new BendwatchError(
    "TRIAL_UNWRITABLE",
    { where: folder, found: cause.message, expected: "a folder that can be written" },
    { cause },
  );
}

/** Puts a folder's new entries on the disk itself, where the system can do that. */
export function syncFolder(folder: string): void {
  try {
    const file = openSync(folder, "r");
    fsyncSync(file);
    closeSync(file);
  } catch {
    // Windows cannot open a folder; its file systems journal the entries.
  }
}
