/** The software's version, as stored in trials and reports. */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { packageRoot } from "./paths.ts";

export const softwareVersion: string = JSON.parse(
  readFileSync(join(packageRoot, "package.json"), "utf8"),
).version;
