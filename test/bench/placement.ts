/** How long `bendwatch layout` takes to place sixteen sensors, with every smaller number compared: the built program, whole. */
import { execFileSync } from "node:child_process";
import { join } from "node:path";
import { packageRoot } from "../../bridge/paths.ts";

export const name = "placement: bendwatch layout, 16 sensors";

const RUNS = 3;

export async function run() {
  const timed = ["carangiform", "anguilliform"].map((gait) => ({ gait, bestS: best(gait) }));
  return {
    rows: timed.map(({ gait, bestS }) => ({ gait, "best s": Number(bestS.toFixed(2)) })),
    json: { worstGaitS: Math.max(...timed.map(({ bestS }) => bestS)), timed },
  };
}

function best(gait: string): number {
  const program = join(packageRoot, "dist", "bendwatch.js");
  const seconds = Array.from({ length: RUNS }, () => {
    const began = performance.now();
    execFileSync(process.execPath, [program, "layout", "--rig", "long-dummy", "--gait", gait]);
    return (performance.now() - began) / 1000;
  });
  return Math.min(...seconds);
}
