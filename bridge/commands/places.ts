/** Where commands find and put trials. */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { packageRoot } from "../paths.ts";

/** Folder of all trials, unless the command says otherwise. */
export const recordingsFolder = join(packageRoot, "recordings");

/** A trial by path, or by its name under recordings/. */
export function trialFolder(nameOrPath: string): string {
  return existsSync(nameOrPath) || /[\\/]/.test(nameOrPath) ? nameOrPath : join(recordingsFolder, nameOrPath);
}

export const dashboardFolder = join(packageRoot, "dist", "dashboard");
