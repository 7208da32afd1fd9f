/**
 * Measures one nine-axis update of the fusion and of the Madgwick filter of `ahrs`, in turn, and prints the result as
 * JSON. Run by ../fusion.ts, bundled, in a process of its own.
 *
 * Rounds are short, a millisecond or so, and alternate between the two, so that whatever else the machine does hits both
 * alike; the best round is the time without it.
 */
import AHRS from "ahrs";
import { ChainFusion } from "../../../bridge/fusion/chain-fusion.ts";
import { CHANNELS, createSweep, HAS_INERTIAL, HAS_MAG } from "../../../bridge/sweep.ts";

const SENSORS = 16;
const RATE_HZ = 200;
/** Distinct sweeps, met in turn; few enough to stay in the cache, as a live sweep does. */
const SWEEPS = 200;
const SWEEPS_A_ROUND = 60;
const WARM_UP_ROUNDS = 400;
const ROUNDS = 1200;

/** ns an update, over the rounds. */
export interface Summary {
  readonly best: number;
  readonly median: number;
  readonly worst: number;
}

export interface Measured {
  readonly sensors: number;
  readonly fusion: Summary & { readonly heapBytes: number; readonly heapBytesLeft: number };
  /** The same with headings held by the body. */
  readonly relative: Summary & { readonly heapBytes: number };
  readonly madgwick: Summary & { readonly heapBytes: number };
  /** Results kept alive, so that nothing is optimised away. */
  readonly kept: number;
}

function measure(): Measured {
  const readings = wavingChain();
  const fusion = fusionRunner(readings, "magnetic");
  const relative = fusionRunner(readings, "relative");
  const madgwick = madgwickRunner(readings);
  const fusionNs: number[] = [];
  const relativeNs: number[] = [];
  const madgwickNs: number[] = [];
  for (let round = 0; round < WARM_UP_ROUNDS + ROUNDS; round++) {
    madgwickNs.push(nsPerUpdate(madgwick.round));
    fusionNs.push(nsPerUpdate(fusion.round));
    relativeNs.push(nsPerUpdate(relative.round));
  }
  return {
    sensors: SENSORS,
    fusion: {
      ...summary(fusionNs.slice(WARM_UP_ROUNDS)),
      heapBytes: heapBytesPerUpdate(fusion.round),
      heapBytesLeft: heapBytesLeft(fusion.round),
    },
    relative: { ...summary(relativeNs.slice(WARM_UP_ROUNDS)), heapBytes: heapBytesPerUpdate(relative.round) },
    madgwick: { ...summary(madgwickNs.slice(WARM_UP_ROUNDS)), heapBytes: heapBytesPerUpdate(madgwick.round) },
    kept: fusion.kept() + relative.kept() + madgwick.kept(),
  };
}

/** A swimming chain with a little noise, SWEEPS x SENSORS x CHANNELS readings: a whole number of tailbeats. */
function wavingChain(): Float64Array {
  const readings = new Float64Array(SWEEPS * SENSORS * CHANNELS);
  const beatsPerSweep = 2 / SWEEPS;
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

function fusionRunner(readings: Float64Array, heading: "magnetic" | "relative") {
  const fusion = new ChainFusion({ sensorCount: SENSORS, rateHz: RATE_HZ, heading });
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

/** What a million updates leave on the heap after a collection, bytes; run with --expose-gc, twice: code is compiled once. */
function heapBytesLeft(round: () => void): number {
  const collect = globalThis.gc!;
  collect();
  const before = process.memoryUsage().heapUsed;
  for (let updates = 0; updates < 1_000_000; updates += SWEEPS_A_ROUND * SENSORS) round();
  collect();
  return process.memoryUsage().heapUsed - before;
}

function summary(times: readonly number[]): Summary {
  const sorted = [...times].sort((a, b) => a - b);
  return { best: sorted[0]!, median: sorted[sorted.length >> 1]!, worst: sorted.at(-1)! };
}

console.log(JSON.stringify(measure()));
