/**
 * From bytes to flags and midline on one core: how many sensor-samples a second the whole pipeline takes, ring buffer
 * included. The bytes are made beforehand, cut as a serial port would, and run through twice; the second run counts.
 */
import { Pipeline } from "../../bridge/pipeline.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import { START_MS } from "../support/rehearse.ts";
import { rigOf64 } from "./rig-64.ts";

export const name = "pipeline: bytes to flags and midline, one core";

interface Case {
  readonly title: string;
  readonly rig: Rig;
  readonly seconds: number;
}

export async function run() {
  const cases: Case[] = [
    { title: "6 sensors x 100 Hz", rig: loadRig("ribbon-foil"), seconds: 240 },
    { title: "16 sensors x 200 Hz", rig: loadRig("long-dummy"), seconds: 120 },
    { title: "64 sensors x 1 kHz", rig: rigOf64(), seconds: 10 },
  ];
  const results = [];
  for (const given of cases) results.push(await measure(given));
  return {
    rows: results.map((r) => ({
      rig: r.title,
      "sensor-samples a second": Math.round(r.samplesPerS).toLocaleString("en"),
      "µs a sweep": r.sweepUs.toFixed(1),
      "times real time": r.timesRealTime.toFixed(1),
      "share of a core at real time": `${(100 / r.timesRealTime).toFixed(1)} %`,
      "heap growth, kB": Math.round(r.heapGrowthKb),
    })),
    json: results,
  };
}

async function measure({ title, rig, seconds }: Case) {
  const chunks: Uint8Array[] = [];
  const source = new RehearsalSource({ rig, rate: "max", startMs: START_MS, durationS: seconds });
  await source.run({ bytes: (chunk) => chunks.push(chunk.slice()), linkState() {}, mark() {} });
  const pass = () => {
    const pipeline = new Pipeline(rig, { startedAt: new Date(START_MS) });
    const heapBefore = process.memoryUsage().heapUsed;
    const began = performance.now();
    for (let i = 0; i < chunks.length; i++) pipeline.bytes(chunks[i]!, START_MS + i);
    const tookS = (performance.now() - began) / 1000;
    const heapGrowthKb = (process.memoryUsage().heapUsed - heapBefore) / 1024;
    return { tookS, heapGrowthKb, sweeps: pipeline.sweepCount };
  };
  pass();
  const { tookS, heapGrowthKb, sweeps } = pass();
  return {
    title,
    samplesPerS: (sweeps * rig.sensors.length) / tookS,
    sweepUs: (tookS * 1e6) / sweeps,
    timesRealTime: sweeps / rig.hub.rateHz / tookS,
    heapGrowthKb,
  };
}
