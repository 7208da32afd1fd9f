/**
 * From bytes to flags and midline on one core: how many sensor-samples a second the whole pipeline takes, ring buffer
 * included.
 */
import { runBundled } from "./bundled.ts";
import type { Measured } from "./pipeline/measure.ts";

export const name = "pipeline: bytes to flags and midline, one core";

export async function run() {
  const results = await runBundled<Measured[]>("pipeline/measure.ts");
  const whole = (value: number) => Math.round(value).toLocaleString("en");
  return {
    rows: results.map((r) => ({
      rig: r.title,
      "sensor-samples a second": whole(r.samplesPerS),
      best: whole(r.bestSamplesPerS),
      "µs a sweep": r.sweepUs.toFixed(1),
      "times real time": r.timesRealTime.toFixed(1),
      "share of a core at real time": `${(100 / r.timesRealTime).toFixed(1)} %`,
    })),
    json: results,
  };
}
