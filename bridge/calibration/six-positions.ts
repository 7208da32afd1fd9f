/**
 * Accelerometer bias and scale from still poses: in each, whatever it is, the calibrated force has the length of local
 * gravity. Six unknowns, so six poses at least, spread over all sides; they need not be exact. Least squares on the length
 * (Gauss-Newton), begun from the ellipsoid with its axes along the sensor's that passes nearest.
 */
import { inverse, solve } from "../numeric/matrix.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { ACCEL, CHANNELS, type Sweep } from "../sweep.ts";
import { type Outcome, type Procedure, type Progress, refused } from "./procedure.ts";
import { StillMeter } from "./still.ts";

export interface SixPositionsNumbers {
  readonly accelBiasMPerS2: readonly [number, number, number];
  readonly accelScale: readonly [number, number, number];
  /** Figures of merit: standard deviations of the worst axis, and what the poses disagree by, RMS. */
  readonly sigmaBiasMPerS2: number;
  readonly sigmaScale: number;
  readonly residualMPerS2: number;
  readonly poses: number;
}

const POSE_S = 2;
const LEAST_POSES = 6;
const MOST_POSES = 40;
/** Cosine beyond which two poses are the same: 20°. */
const SAME = 0.94;
/** A face is seen when some pose has it up within 40°. */
const FACE = 0.766;
/** What one pose's mean is good for, m/s²: cross-axis errors and the like, which averaging leaves (ours, no source). */
const POSE_SIGMA = 0.003;
/** Beyond these the poses do not tell enough, or do not fit: m/s², share, m/s². */
const LARGEST_SIGMA_BIAS = 0.02;
const LARGEST_SIGMA_SCALE = 0.002;
const LARGEST_RESIDUAL = 0.05;
const STEPS = 15;
export const FACES = ["x up", "x down", "y up", "y down", "z up", "z down"] as const;

export class SixPositions implements Procedure<SixPositionsNumbers> {
  readonly #gravity: number;
  readonly #still: StillMeter;
  /** sensors x MOST_POSES x 3. */
  readonly #poses: Float64Array;
  readonly #count: Uint32Array;
  /** Run of stillness that the newest pose was taken from, and which pose that is; -1 for none. */
  readonly #run: Int32Array;
  readonly #open: Int32Array;

  /** @param gravity at the site, m/s² */
  constructor(
    sensors: readonly SensorPlace[],
    models: readonly SensorModel[],
    rateHz: number,
    gravity: number,
  ) {
    const n = sensors.length;
    this.#gravity = gravity;
    this.#still = new StillMeter(
      sensors.map((sensor, i) => ({ model: models[i]!, rateHz: sensor.rateHz })),
      rateHz,
    );
    this.#poses = new Float64Array(n * MOST_POSES * 3);
    this.#count = new Uint32Array(n);
    this.#run = new Int32Array(n).fill(-1);
    this.#open = new Int32Array(n).fill(-1);
  }

  observe(sweep: Sweep): void {
    this.#still.observe(sweep, sweep.raw);
    const { stillS, runs, mean } = this.#still;
    for (let i = 0; i < stillS.length; i++) {
      if (stillS[i]! < POSE_S) continue;
      const at = i * CHANNELS + ACCEL;
      if (this.#run[i] !== runs[i]) {
        this.#run[i] = runs[i]!;
        this.#open[i] = this.#slotFor(i, mean, at);
      }
      if (this.#open[i]! < 0) continue;
      const to = (i * MOST_POSES + this.#open[i]!) * 3;
      for (let k = 0; k < 3; k++) this.#poses[to + k] = mean[at + k]!;
    }
  }

  /** A new pose's slot; -1 where it was had before, or there is no room. */
  #slotFor(i: number, mean: Float64Array, at: number): number {
    for (let p = 0; p < this.#count[i]!; p++) {
      const pose = (i * MOST_POSES + p) * 3;
      let dot = 0;
      let own = 0;
      let other = 0;
      for (let k = 0; k < 3; k++) {
        dot += this.#poses[pose + k]! * mean[at + k]!;
        own += mean[at + k]! ** 2;
        other += this.#poses[pose + k]! ** 2;
      }
      if (dot > SAME * Math.sqrt(own * other)) return -1;
    }
    return this.#count[i]! < MOST_POSES ? this.#count[i]!++ : -1;
  }

  progress(): Progress {
    const shares = Array.from(this.#count, (count, i) => {
      const seen = FACES.length - this.#missing(i).length;
      return Math.min(count / LEAST_POSES, seen / FACES.length);
    });
    // Sensors that are not being turned are not waited for.
    const best = shares.reduce((a, b) => Math.max(a, b), 0);
    const worst = shares.filter((share) => share > 1 / FACES.length).reduce((a, b) => Math.min(a, b), best);
    if (worst === 1) return { share: 1, text: "Done." };
    const missing = this.#missing(shares.indexOf(worst));
    return {
      share: worst,
      text: `Hold it still for ${POSE_S} s with each side up; missing: ${missing.join(", ")}.`,
    };
  }

  #missing(i: number): string[] {
    return FACES.filter((_, face) => {
      const axis = face >> 1;
      const sign = face % 2 === 0 ? 1 : -1;
      return !this.#posesOf(i).some((f) => sign * f[axis]! > FACE * Math.hypot(...f));
    });
  }

  #posesOf(i: number): Float64Array[] {
    return Array.from({ length: this.#count[i]! }, (_, p) => {
      const at = (i * MOST_POSES + p) * 3;
      return this.#poses.subarray(at, at + 3);
    });
  }

  result(): readonly Outcome<SixPositionsNumbers>[] {
    return Array.from(this.#count, (_, i) => this.#outcome(i));
  }

  #outcome(i: number): Outcome<SixPositionsNumbers> {
    const poses = this.#posesOf(i);
    const missing = this.#missing(i);
    const ask = missing.length > 0 ? `; missing: ${missing.join(", ")}` : "";
    if (poses.length < LEAST_POSES)
      return refused(`${poses.length} still poses, ${LEAST_POSES} are needed${ask}`);
    const fit = fitLength(poses, this.#gravity);
    if (fit === null) return refused(`these poses do not tell bias from scale${ask}`);
    const { bias, scale, residual, sigmaBias, sigmaScale } = fit;
    if (sigmaBias > LARGEST_SIGMA_BIAS || sigmaScale > LARGEST_SIGMA_SCALE) {
      return refused(`these poses lie too close to each other${ask}`);
    }
    if (residual > LARGEST_RESIDUAL) {
      return refused(
        `the poses disagree by ${residual.toFixed(2)} m/s²: was it held still, and is gravity right?`,
      );
    }
    const numbers = {
      accelBiasMPerS2: bias,
      accelScale: scale,
      sigmaBiasMPerS2: sigmaBias,
      sigmaScale,
      residualMPerS2: residual,
      poses: poses.length,
    };
    return { ok: true, numbers, warnings: missing.length > 0 ? [`not seen with ${missing.join(", ")}`] : [] };
  }
}

type Triple = readonly [number, number, number];

interface LengthFit {
  readonly bias: Triple;
  readonly scale: Triple;
  readonly residual: number;
  readonly sigmaBias: number;
  readonly sigmaScale: number;
}

/** Bias and scale for which all vectors have one length; null where they do not tell. */
function fitLength(vectors: readonly Float64Array[], length: number): LengthFit | null {
  const p = startOf(vectors, length);
  if (p === null) return null;
  let covariance: Float64Array | null = null;
  let squares = 0;
  for (let step = 0; step < STEPS; step++) {
    const normal = new Float64Array(36);
    const pull = new Float64Array(6);
    squares = 0;
    for (const f of vectors) {
      const u = [0, 1, 2].map((k) => p[3 + k]! * (f[k]! - p[k]!));
      const norm = Math.hypot(...u);
      const off = length - norm;
      squares += off * off;
      const slope = [
        ...u.map((value, k) => (-value * p[3 + k]!) / norm),
        ...u.map((value, k) => (value * (f[k]! - p[k]!)) / norm),
      ];
      for (let r = 0; r < 6; r++) {
        pull[r]! += slope[r]! * off;
        for (let c = 0; c < 6; c++) normal[6 * r + c]! += slope[r]! * slope[c]!;
      }
    }
    covariance = inverse(normal, 6);
    const by = covariance && solve(normal, pull, 6);
    if (by === null || covariance === null) return null;
    for (let k = 0; k < 6; k++) p[k]! += by[k]!;
  }
  const spare = vectors.length - 6;
  const sigma = Math.max(POSE_SIGMA, spare > 0 ? Math.sqrt(squares / spare) : 0);
  const worst = (from: number) =>
    sigma * Math.sqrt(Math.max(...[0, 1, 2].map((k) => covariance![(from + k) * 7]!)));
  return {
    bias: [p[0]!, p[1]!, p[2]!],
    scale: [p[3]!, p[4]!, p[5]!],
    residual: Math.sqrt(squares / vectors.length),
    sigmaBias: worst(0),
    sigmaScale: worst(3),
  };
}

/** The ellipsoid a x² + b y² + c z² + d x + e y + f z = 1 nearest to the vectors, as bias and scale. */
function startOf(vectors: readonly Float64Array[], length: number): Float64Array | null {
  const normal = new Float64Array(36);
  const right = new Float64Array(6);
  for (const f of vectors) {
    const [x, y, z] = [f[0]! / length, f[1]! / length, f[2]! / length];
    const row = [x * x, y * y, z * z, x, y, z];
    for (let r = 0; r < 6; r++) {
      right[r]! += row[r]!;
      for (let c = 0; c < 6; c++) normal[6 * r + c]! += row[r]! * row[c]!;
    }
  }
  const q = solve(normal, right, 6);
  if (q === null) return null;
  const centre = [0, 1, 2].map((k) => -q[3 + k]! / (2 * q[k]!));
  const constant = 1 + centre.reduce((sum, c, k) => sum + q[k]! * c * c, 0);
  const scales = [0, 1, 2].map((k) => Math.sqrt(q[k]! / constant));
  if (!scales.every((scale) => scale > 0.5 && scale < 2)) return Float64Array.of(0, 0, 0, 1, 1, 1);
  return Float64Array.from([...centre.map((c) => c * length), ...scales]);
}
