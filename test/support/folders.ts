/** Temporary folders for tests, gone when the test process ends. */
import { createHash } from "node:crypto";
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { packageRoot } from "../../bridge/paths.ts";

const made: string[] = [];
process.once("exit", () => {
  for (const folder of made) rmSync(folder, { recursive: true, force: true });
});

export function temporaryFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), "bendwatch-test-"));
  made.push(folder);
  return folder;
}

/** Name and SHA-256 of every file in a folder. */
export function fingerprints(folder: string): Record<string, string> {
  return Object.fromEntries(
    readdirSync(folder)
      .sort()
      .map((name) => [
        name,
        createHash("sha256")
          .update(readFileSync(join(folder, name)))
          .digest("hex"),
      ]),
  );
}

/** A rig file of config/rigs, changed; returns the path of the copy. */
export function writeRig(name: string, change: (rig: RigJson) => void): string {
  const rig = JSON.parse(
    readFileSync(join(packageRoot, "config", "rigs", `${name}.json`), "utf8"),
  ) as RigJson;
  change(rig);
  const path = join(temporaryFolder(), `${name}.json`);
  writeFileSync(path, JSON.stringify(rig));
  return path;
}

/** As written in the file, before any check: tests put wrong things in. */
interface RigJson {
  hub: Record<string, unknown>;
  sensors: Record<string, unknown>[];
  [key: string]: unknown;
}
