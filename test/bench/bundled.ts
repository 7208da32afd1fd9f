/**
 * Runs a measuring program as the product ships: bundled with the build's own settings, by plain Node in a process of its
 * own. A TypeScript loader in the process slows the code by a quarter.
 */
import { execFileSync } from "node:child_process";
import { join } from "node:path";
import { build } from "esbuild";
import { packageRoot } from "../../bridge/paths.ts";

/** @returns what the program printed, one JSON value */
export async function runBundled<T>(entry: string, nodeOptions: readonly string[] = []): Promise<T> {
  const outfile = join(packageRoot, "dist", "bench", entry.replace(/\.ts$/, ".mjs"));
  await build({
    entryPoints: [join(import.meta.dirname, entry)],
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    packages: "external",
    outfile,
    logLevel: "warning",
  });
  return JSON.parse(execFileSync(process.execPath, [...nodeOptions, outfile], { encoding: "utf8" })) as T;
}
