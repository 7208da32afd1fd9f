/**
 * Real recordings of one nine-axis unit with optical reference: 13 of the 39 trials of D. Laidig, M. Caruso, A. Cereatti,
 * T. Seel, "BROAD - A Benchmark for Robust Inertial Orientation Estimation", Data 6(7):72, 2021, doi:10.3390/data6070072
 * (CC BY 4.0), as gzipped CSV files with a reference.json of published-method scores beside them. Not part of the
 * project: found where present.
 */
import { existsSync, readdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { ChainFusion } from "../../bridge/fusion/chain-fusion.ts";
import { DEG_PER_RAD } from "../../bridge/numeric/units.ts";
import { ACCEL, CHANNELS, createSweep, HAS_INERTIAL, HAS_MAG, type Sweep } from "../../bridge/sweep.ts";

export interface Trial {
  readonly name: string;
  readonly rateHz: number;
  readonly samples: number;
  readonly timesS: Float64Array;
  /** samples x 9, as in a sweep. */
  readonly values: Float64Array;
  /** samples x 4, sensor to earth; not a number where the cameras lost sight. */
  readonly reference: Float64Array;
  /** 1 where errors count. */
  readonly movement: Uint8Array;
}

/** Errors of a run, RMS over the samples that count, degrees. */
export interface Scores {
  readonly totalDeg: number;
  readonly headingDeg: number;
  readonly inclinationDeg: number;
  /** Error over the standard deviation that the fusion states for it: 1 where it is honest on average. */
  readonly headingRatio: number;
  readonly inclinationRatio: number;
}

/** What reference.json says of one trial. */
export interface ReferenceScores {
  readonly total_rmse_deg: number;
  readonly heading_rmse_deg: number;
  readonly inclination_rmse_deg: number;
  readonly with_losses: { readonly total_rmse_deg: { readonly linear_interpolation: number } };
}

const RATE_HZ = 2000 / 7; // 285.714 Hz

/** The folder of these trials under the open-data folder, or null when it is not there. */
export function trialFolder(openData: string): string | null {
  const folder = join(openData, "optical-imu");
  return existsSync(join(folder, "reference.json")) ? folder : null;
}

/** Names of all trials in the folder. */
export function trialNames(folder: string): string[] {
  return readdirSync(folder)
    .filter((file) => file.endsWith(".csv.gz"))
    .map((file) => file.replace(/\.csv\.gz$/, ""))
    .sort();
}

export function readReference(folder: string): Record<string, ReferenceScores> {
  return JSON.parse(readFileSync(join(folder, "reference.json"), "utf8")) as Record<string, ReferenceScores>;
}

export function readTrial(folder: string, name: string): Trial {
  const lines = gunzipSync(readFileSync(join(folder, `${name}.csv.gz`)))
    .toString("utf8")
    .trimEnd()
    .split("\n");
  const samples = lines.length - 1;
  const trial: Trial = {
    name,
    rateHz: RATE_HZ,
    samples,
    timesS: new Float64Array(samples),
    values: new Float64Array(samples * 9),
    reference: new Float64Array(samples * 4),
    movement: new Uint8Array(samples),
  };
  for (let i = 0; i < samples; i++) {
    const cells = lines[i + 1]!.split(",").map((cell) => (cell === "" ? Number.NaN : Number(cell)));
    trial.timesS[i] = cells[0]!;
    trial.values.set(cells.slice(1, 10), i * 9);
    trial.reference.set(cells.slice(10, 14), i * 4);
    trial.movement[i] = cells[14]!;
  }
  return trial;
}

/** Numbers between 0 and 1, the same each time: S. K. Park, K. W. Miller, Comm. ACM 31(10), 1988. */
function parkMiller(): () => number {
  let n = 1234567890;
  return () => {
    n = (16807 * n) % 2147483647;
    return n / 2147483647;
  };
}

/**
 * Lost samples, 1 where lost, about 5.4 %: bursts of 20 and single ones, from a Park-Miller generator started alike for
 * every trial (the pattern of the data's own description).
 */
export function lossPattern(samples: number): Uint8Array {
  const lost = new Uint8Array(samples);
  const draw = parkMiller();
  for (let i = 1000; i < samples; ) {
    if (draw() < 0.0025) {
      lost.fill(1, i, i + 20);
      i += 20;
    } else {
      if (draw() < 0.01) lost[i] = 1;
      i++;
    }
  }
  return lost;
}

/** Plus and minus 500 degrees a second, rad/s, for trials that are faster than that. */
export const CLIP_RANGE = 500 / DEG_PER_RAD;
/** The trials that are, by the start of their names. */
export const CLIPPED_TRIALS = ["06", "16", "21", "29"];

/** What is done to a trial before it is fused. */
export interface Damage {
  /** 1 where a sample is lost. */
  readonly lost?: Uint8Array;
  /** The gyroscope is cut off at plus and minus this on each axis, rad/s. */
  readonly gyroRange?: number;
  /** Sample times are displaced, each by up to this share of the interval either way. */
  readonly jitter?: number;
}

/**
 * Runs a trial through the fusion and scores every sample that counts, lost ones too. Jittered: a sample is taken at its
 * displaced time, rate, force and field each on the straight line between the two samples around it, and compared with
 * the reference of its regular time.
 */
export function scoreTrial(trial: Trial, { lost, gyroRange = Infinity, jitter = 0 }: Damage = {}): Scores {
  const fusion = new ChainFusion({
    sensorCount: 1,
    rateHz: trial.rateHz,
    heading: "magnetic",
    gyroRanges: [gyroRange],
  });
  const sweep = createSweep(1);
  sweep.stepS = 1 / trial.rateHz;
  const sums = { total: 0, heading: 0, inclination: 0, headingRatio: 0, inclinationRatio: 0, count: 0 };
  const draw = parkMiller();
  for (let i = 0; i < trial.samples; i++) {
    const isLost = lost?.[i] === 1;
    const late = jitter > 0 && i > 0 && i < trial.samples - 1 ? jitter * (2 * draw() - 1) : 0;
    sweep.timeS = trial.timesS[i]! + late / trial.rateHz;
    sweep.present[0] = isLost ? 0 : HAS_INERTIAL | HAS_MAG;
    if (!isLost) fill(sweep, trial, i, late, gyroRange);
    fusion.step(sweep);
    if (trial.movement[i] === 1) addErrors(sums, fusion, trial.reference.subarray(i * 4, i * 4 + 4));
  }
  const rms = (sum: number) => Math.sqrt(sum / sums.count);
  return {
    totalDeg: rms(sums.total) * DEG_PER_RAD,
    headingDeg: rms(sums.heading) * DEG_PER_RAD,
    inclinationDeg: rms(sums.inclination) * DEG_PER_RAD,
    headingRatio: rms(sums.headingRatio),
    inclinationRatio: rms(sums.inclinationRatio),
  };
}

/** The readings at sample i and a share of an interval later, cut off at the gyroscope's range. */
function fill(sweep: Sweep, trial: Trial, i: number, late: number, gyroRange: number): void {
  const other = i + Math.sign(late);
  for (let c = 0; c < CHANNELS; c++) {
    const here = trial.values[i * CHANNELS + c]!;
    const there = trial.values[other * CHANNELS + c]!;
    const value = here + Math.abs(late) * (there - here);
    sweep.values[c] = c < ACCEL ? Math.max(-gyroRange, Math.min(gyroRange, value)) : value;
  }
  sweep.raw.set(sweep.values);
}

/** Mean of each error over several runs. */
export function meanScores(all: readonly Scores[]): Scores {
  const mean = (pick: (scores: Scores) => number) => all.reduce((sum, s) => sum + pick(s), 0) / all.length;
  return {
    totalDeg: mean((s) => s.totalDeg),
    headingDeg: mean((s) => s.headingDeg),
    inclinationDeg: mean((s) => s.inclinationDeg),
    headingRatio: mean((s) => s.headingRatio),
    inclinationRatio: mean((s) => s.inclinationRatio),
  };
}

/** The error measure of the data's paper: e = q conj(r); total, heading and inclination parts of it, squared. */
function addErrors(
  sums: Record<"total" | "heading" | "inclination" | "headingRatio" | "inclinationRatio" | "count", number>,
  fusion: ChainFusion,
  r: Float64Array,
): void {
  const [rw, rx, ry, rz] = [r[0]!, r[1]!, r[2]!, r[3]!];
  if (Number.isNaN(rw)) return;
  const q = fusion.orientations;
  const [qw, qx, qy, qz] = [q[0]!, q[1]!, q[2]!, q[3]!];
  const ew = qw * rw + qx * rx + qy * ry + qz * rz;
  const ez = qz * rw - qw * rz - qx * ry + qy * rx;
  const inclination = (2 * Math.acos(Math.min(1, Math.sqrt(ew * ew + ez * ez)))) ** 2;
  const heading = (2 * Math.atan(Math.abs(ez / ew))) ** 2;
  sums.total += (2 * Math.acos(Math.min(1, Math.abs(ew)))) ** 2;
  sums.inclination += inclination;
  sums.heading += heading;
  sums.inclinationRatio += inclination / fusion.inclinationSigma[0]! ** 2;
  sums.headingRatio += heading / fusion.headingSigma[0]! ** 2;
  sums.count++;
}
