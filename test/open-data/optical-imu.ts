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
import { createSweep, HAS_INERTIAL, HAS_MAG } from "../../bridge/sweep.ts";

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

/**
 * Lost samples, 1 where lost, about 5.4 %: bursts of 20 and single ones, from a Park-Miller generator started alike for
 * every trial (the pattern of the data's own description).
 */
export function lossPattern(samples: number): Uint8Array {
  const lost = new Uint8Array(samples);
  let n = 1234567890;
  const draw = () => {
    n = (16807 * n) % 2147483647;
    return n / 2147483647;
  };
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

/** Runs a trial through the fusion and scores every sample that counts, lost ones too. */
export function scoreTrial(trial: Trial, lost?: Uint8Array): Scores {
  const fusion = new ChainFusion({ sensorCount: 1, rateHz: trial.rateHz, heading: "magnetic" });
  const sweep = createSweep(1);
  sweep.stepS = 1 / trial.rateHz;
  const sums = { total: 0, heading: 0, inclination: 0, count: 0 };
  for (let i = 0; i < trial.samples; i++) {
    const isLost = lost?.[i] === 1;
    sweep.timeS = trial.timesS[i]!;
    sweep.present[0] = isLost ? 0 : HAS_INERTIAL | HAS_MAG;
    if (!isLost) sweep.values.set(trial.values.subarray(i * 9, i * 9 + 9));
    fusion.step(sweep);
    if (trial.movement[i] === 1)
      addErrors(sums, fusion.orientations, trial.reference.subarray(i * 4, i * 4 + 4));
  }
  const rms = (sum: number) => Math.sqrt(sum / sums.count) * DEG_PER_RAD;
  return { totalDeg: rms(sums.total), headingDeg: rms(sums.heading), inclinationDeg: rms(sums.inclination) };
}

/** Mean of each error over several runs. */
export function meanScores(all: readonly Scores[]): Scores {
  const mean = (pick: (scores: Scores) => number) => all.reduce((sum, s) => sum + pick(s), 0) / all.length;
  return {
    totalDeg: mean((s) => s.totalDeg),
    headingDeg: mean((s) => s.headingDeg),
    inclinationDeg: mean((s) => s.inclinationDeg),
  };
}

/** The error measure of the data's paper: e = q conj(r); total, heading and inclination parts of it, squared. */
function addErrors(
  sums: { total: number; heading: number; inclination: number; count: number },
  q: Float64Array,
  r: Float64Array,
): void {
  const [rw, rx, ry, rz] = [r[0]!, r[1]!, r[2]!, r[3]!];
  if (Number.isNaN(rw)) return;
  const [qw, qx, qy, qz] = [q[0]!, q[1]!, q[2]!, q[3]!];
  const ew = qw * rw + qx * rx + qy * ry + qz * rz;
  const ez = qz * rw - qw * rz - qx * ry + qy * rx;
  sums.total += (2 * Math.acos(Math.min(1, Math.abs(ew)))) ** 2;
  sums.inclination += (2 * Math.acos(Math.min(1, Math.sqrt(ew * ew + ez * ez)))) ** 2;
  sums.heading += (2 * Math.atan(Math.abs(ez / ew))) ** 2;
  sums.count++;
}
