/**
 * Time of one nine-axis fusion update, beside the Madgwick filter of the npm package `ahrs` on the same readings in the
 * same run, and what an update leaves on the heap. Measured on the bundled code, as it ships: bundled here with the
 * build's own settings.
 *
 * Rounds are short, a millisecond or so, and alternate between the two, so that whatever else the machine does hits both
 * alike; the best round is the time without it.
 */
import { join } from "node:path";
import AHRS from "ahrs";
import { build } from "esbuild";
import { CHANNELS, createSweep, HAS_INERTIAL, HAS_MAG } from "../../bridge/sweep.ts";

export const name = "fusion";

const SENSORS = 16;
const RATE_HZ = 200;
/** Distinct sweeps, met in turn. */
const SWEEPS = 2000;
const SWEEPS_A_ROUND = 60;
const WARM_UP_ROUNDS = 400;
const ROUNDS = 1200;

type Fusion = typeof import("../../bridge/fusion/chain-fusion.ts");

export async function run(): Promise<{ rows: Record<string, string | number>[]; json: unknown }> {
  const readings = wavingChain();
  const fusion = fusionRunner(await bundledFusion(), readings);
  const madgwick = madgwickRunner(readings);
  const fusionNs: number[] = [];
  const madgwickNs: number[] = [];
  for (let round = 0; round < WARM_UP_ROUNDS + ROUNDS; round++) {
    madgwickNs.push(nsPerUpdate(madgwick.round));
    fusionNs.push(nsPerUpdate(fusion.round));
  }
  const ours = summary(fusionNs.slice(WARM_UP_ROUNDS));
  const theirs = summary(madgwickNs.slice(WARM_UP_ROUNDS));
  const bytes = heapBytesPerUpdate(fusion.round);
  return {
    rows: [
      row(`ChainFusion, ${SENSORS} sensors`, ours, theirs, bytes),
      row("ahrs Madgwick", theirs, theirs, heapBytesPerUpdate(madgwick.round)),
    ],
    json: {
      sensors: SENSORS,
      fusionNsPerUpdate: ours,
      madgwickNsPerUpdate: theirs,
      ratioOfBest: ours.best / theirs.best,
      ratioOfMedians: ours.median / theirs.median,
      heapBytesPerUpdate: bytes,
      /** Results kept alive, so that nothing is optimised away. */
      kept: fusion.kept() + madgwick.kept(),
    },
  };
}

async function bundledFusion(): Promise<Fusion> {
  const root = join(import.meta.dirname, "../..");
  const outfile = join(root, "dist/bench/chain-fusion.mjs");
  await build({
    entryPoints: [join(root, "bridge/fusion/chain-fusion.ts")],
    bundle: true,
    platform: "node",
    format: "esm",
    target: "node20",
    outfile,
    logLevel: "warning",
  });
  return (await import(outfile)) as Fusion;
}

/** A swimming chain with a little noise, SWEEPS x SENSORS x CHANNELS readings: a whole number of tailbeats. */
function wavingChain(): Float64Array {
  const readings = new Float64Array(SWEEPS * SENSORS * CHANNELS);
  const beatsPerSweep = 17 / SWEEPS;
  let seed = 1;
  const noise = () => {
    seed = (16807 * seed) % 2147483647;
    return 0.02 * (seed / 2147483647 - 0.5);
  };
  for (let i = 0; i < SWEEPS; i++) {
    for (let sensor = 0; sensor < SENSORS; sensor++) {
      const phase = 2 * Math.PI * beatsPerSweep * i - sensor * 0.4;
      const yaw = 0.5 * Math.sin(phase);
      const rate = 0.5 * 2 * Math.PI * beatsPerSweep * RATE_HZ * Math.cos(phase);
      const clean = [0, 0, rate, 0, 2 * Math.sin(phase), 9.81, 20 * Math.sin(yaw), 20 * Math.cos(yaw), -45];
      readings.set(
        clean.map((value) => value + noise()),
        (i * SENSORS + sensor) * CHANNELS,
      );
    }
  }
  return readings;
}

function fusionRunner({ ChainFusion }: Fusion, readings: Float64Array) {
  const fusion = new ChainFusion({ sensorCount: SENSORS, rateHz: RATE_HZ, heading: "magnetic" });
  const sweep = createSweep(SENSORS);
  sweep.present.fill(HAS_INERTIAL | HAS_MAG);
  sweep.stepS = 1 / RATE_HZ;
  const width = SENSORS * CHANNELS;
  const rows = Array.from({ length: SWEEPS }, (_, i) => readings.subarray(i * width, (i + 1) * width));
  let count = 0;
  return {
    round: () => {
      for (let i = 0; i < SWEEPS_A_ROUND; i++, count++) {
        sweep.values.set(rows[count % SWEEPS]!);
        sweep.timeS = count / RATE_HZ;
        fusion.step(sweep);
      }
    },
    kept: () => fusion.orientations[0]!,
  };
}

function madgwickRunner(readings: Float64Array) {
  const filters = Array.from(
    { length: SENSORS },
    () => new AHRS({ sampleInterval: RATE_HZ, algorithm: "Madgwick" }),
  );
  let count = 0;
  return {
    round: () => {
      for (let i = 0; i < SWEEPS_A_ROUND; i++, count++) {
        for (let sensor = 0; sensor < SENSORS; sensor++) {
          const at = ((count % SWEEPS) * SENSORS + sensor) * CHANNELS;
          const [gx, gy, gz] = [readings[at]!, readings[at + 1]!, readings[at + 2]!];
          const [ax, ay, az] = [readings[at + 3]!, readings[at + 4]!, readings[at + 5]!];
          const [mx, my, mz] = [readings[at + 6]!, readings[at + 7]!, readings[at + 8]!];
          filters[sensor]!.update(gx, gy, gz, ax, ay, az, mx, my, mz);
        }
      }
    },
    kept: () => filters[0]!.getQuaternion().w,
  };
}

function nsPerUpdate(round: () => void): number {
  const start = process.hrtime.bigint();
  round();
  return Number(process.hrtime.bigint() - start) / (SWEEPS_A_ROUND * SENSORS);
}

/** Heap growth of an update, bytes, smallest of several rounds: collections in between would hide it, never raise it. */
function heapBytesPerUpdate(round: () => void): number {
  const growths = Array.from({ length: 20 }, () => {
    const before = process.memoryUsage().heapUsed;
    round();
    return process.memoryUsage().heapUsed - before;
  });
  const positive = growths.filter((growth) => growth >= 0);
  return Math.min(...positive) / (SWEEPS_A_ROUND * SENSORS);
}

interface Summary {
  readonly best: number;
  readonly median: number;
  readonly worst: number;
}

function summary(times: readonly number[]): Summary {
  const sorted = [...times].sort((a, b) => a - b);
  return { best: sorted[0]!, median: sorted[sorted.length >> 1]!, worst: sorted.at(-1)! };
}

function row(
  filter: string,
  times: Summary,
  baseline: Summary,
  bytes: number,
): Record<string, string | number> {
  const rounded = (value: number, digits: number) => Number(value.toFixed(digits));
  return {
    filter,
    "best ns": rounded(times.best, 0),
    "median ns": rounded(times.median, 0),
    "ratio of best": rounded(times.best / baseline.best, 2),
    "ratio of medians": rounded(times.median / baseline.median, 2),
    "heap bytes": rounded(bytes, 1),
  };
}
