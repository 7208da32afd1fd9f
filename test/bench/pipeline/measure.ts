/**
 * Measures the pipeline, as a program of its own: prints one JSON line. The bytes are made beforehand, cut as a serial
 * port would, and run through several times; the first runs warm up, the others count.
 */
import { Pipeline } from "../../../bridge/pipeline.ts";
import { RehearsalSource } from "../../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../../bridge/rig/load.ts";
import { START_MS } from "../../support/rehearse.ts";
import { rigOf64 } from "./rig-64.ts";

const RUNS = 8;
const WARM_UP_RUNS = 3;

export interface Measured {
  readonly title: string;
  /** Median of the runs, and the best. */
  readonly samplesPerS: number;
  readonly bestSamplesPerS: number;
  readonly sweepUs: number;
  readonly timesRealTime: number;
}

const cases: readonly (readonly [string, Rig, number])[] = [
  ["6 sensors x 100 Hz", loadRig("ribbon-foil"), 60],
  ["16 sensors x 200 Hz", loadRig("long-dummy"), 30],
  ["64 sensors x 1 kHz", rigOf64(), 4],
];
const results: Measured[] = [];
for (const [title, rig, seconds] of cases) results.push(await measure(title, rig, seconds));
console.log(JSON.stringify(results));

async function measure(title: string, rig: Rig, seconds: number): Promise<Measured> {
  const chunks: Uint8Array[] = [];
  const source = new RehearsalSource({ rig, rate: "max", startMs: START_MS, durationS: seconds });
  await source.run({ bytes: (chunk) => chunks.push(chunk.slice()), linkState() {}, mark() {} });
  const sweepS: number[] = [];
  for (let run = 0; run < RUNS; run++) {
    const pipeline = new Pipeline(rig, { startedAt: new Date(START_MS) });
    const began = performance.now();
    // 4 ms between chunks, as a port's driver gives them.
    for (let i = 0; i < chunks.length; i++) pipeline.bytes(chunks[i]!, START_MS + 4 * i);
    const tookS = (performance.now() - began) / 1000;
    if (run >= WARM_UP_RUNS) sweepS.push(tookS / pipeline.sweepCount);
  }
  sweepS.sort((a, b) => a - b);
  const median = sweepS[Math.floor(sweepS.length / 2)]!;
  return {
    title,
    samplesPerS: rig.sensors.length / median,
    bestSamplesPerS: rig.sensors.length / sweepS[0]!,
    sweepUs: median * 1e6,
    timesRealTime: 1 / (median * rig.hub.rateHz),
  };
}
