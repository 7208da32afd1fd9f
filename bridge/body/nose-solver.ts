/**
 * The nose's harmonics from those of all sensors (head-motion.ts): generalised least squares, so that each sensor counts by
 * what it is worth, and for what it knows.
 *
 * What a sensor errs. Its accelerometer's noise, which weighs by 1 / (k w)²; the shape between the nose and there, whose
 * error grows with the distance; and its accelerometer's bias. The bias turns with the sensor, so as far as the sensor yaws
 * at the tailbeat it looks like an acceleration: by b times the yaw's own first harmonic, and in step with it. Along that
 * one phase the sensor is believed less, a quarter beat from it not. Since the wave runs down the body, others see there.
 *
 * Two known errors are taken off. The fusion's inclination follows the specific force low-passed, so of a horizontal
 * acceleration its low-passed part goes missing; the filter is known, and divided out. And readings may be older than the
 * orientations beside them.
 */
import type { HarmonicFit } from "../numeric/harmonic-fit.ts";

/** What is fitted of every sensor, travel axes (ahead, left, up): specific force, m/s²; place, m; sine of the yaw. */
export enum Channel {
  FORCE = 0,
  PLACE = FORCE + 3,
  ANGLE = PLACE + 3,
  COUNT = ANGLE + 1,
}

export const HARMONICS = 3;

/** Error of a fitted acceleration, m/s²: noise over the memory and what is left of inclination errors. Ours, no source. */
const ACCEL_SIGMA = 0.02;
/** Bias of an accelerometer, m/s²: 20 mg, common practice, no source. */
const BIAS_SIGMA = 0.2;
/** Error of the midline's harmonics as a share of the way from the nose, which begins here (share of the length). Ours. */
const SHAPE_SIGMA = 0.01;
const NEAR = 0.15;
/** A sensor counts with at least this share of its readings whole. Ours, no source. */
const WHOLE_SHARE = 0.25;

export interface NoseSolverOptions {
  readonly stations: readonly number[];
  readonly lengthM: number;
  /** Time constant of the fusion's low-pass of the specific force, s. */
  readonly levelTauS: number;
  /** How long before the orientation a reading is, s. */
  readonly delayS: number;
}

export class NoseSolver {
  /** By axis and harmonic: cosine and sine of the nose's displacement, m. Borrowed. */
  readonly harmonics = new Float64Array(6 * HARMONICS);
  /** Share of the sensors' mean square motion that their accelerations do not confirm; 1 when gravity is all they show. */
  unconfirmed = 1;
  /** How many sensors took part. */
  sensors = 0;

  readonly #shapeVariance: Float64Array;
  readonly #levelTauS: number;
  readonly #delayS: number;
  /** Complex factor from acceleration to displacement at the harmonic at hand. */
  #real = 0;
  #imaginary = 0;
  /** By sensor: what it tells of the nose (cosine, sine), the bias's share of it, and the variance. */
  readonly #told: Float64Array;
  #apart = 0;
  #motion = 0;

  constructor({ stations, lengthM, levelTauS, delayS }: NoseSolverOptions) {
    this.#shapeVariance = Float64Array.from(
      stations,
      (station) => (SHAPE_SIGMA * lengthM * (NEAR + station)) ** 2,
    );
    this.#levelTauS = levelTauS;
    this.#delayS = delayS;
    this.#told = new Float64Array(5 * stations.length);
  }

  /**
   * @param fit Channel.COUNT channels a sensor, HARMONICS harmonics
   * @param whole by sensor, share of its readings that could be used
   * @param omega of the beat, rad/s
   */
  solve(fit: HarmonicFit, whole: Float64Array, omega: number): void {
    this.#apart = 0;
    this.#motion = 0;
    this.sensors = 0;
    for (let i = 0; i < whole.length; i++) if (whole[i]! >= WHOLE_SHARE) this.sensors++;
    for (let k = 0; k < HARMONICS; k++) {
      for (let axis = 0; axis < 3; axis++) {
        this.#setFactor((k + 1) * omega, axis < 2);
        this.#solveOne(fit, whole, k, axis, omega);
      }
    }
    this.unconfirmed = this.#motion > 0 ? this.#apart / this.#motion : 1;
  }

  #setFactor(omega: number, horizontal: boolean): void {
    const scale = -1 / (omega * omega);
    const cosine = scale * Math.cos(omega * this.#delayS);
    const sine = scale * Math.sin(omega * this.#delayS);
    // The low-pass is 2 / (2 - u² + 2 i u); what it leaves, inverted, is 1 - 2 (1 + 2 i / u) / (u² + 4).
    const u = omega * this.#levelTauS;
    const missing = horizontal ? 2 / (u * u + 4) : 0;
    const real = 1 - missing;
    const imaginary = (-2 * missing) / u;
    this.#real = cosine * real - sine * imaginary;
    this.#imaginary = cosine * imaginary + sine * real;
  }

  /** Weighted least squares for one harmonic along one axis: two unknowns, cosine and sine. */
  #solveOne(fit: HarmonicFit, whole: Float64Array, k: number, axis: number, omega: number): void {
    const { coefficients, size } = fit;
    const told = this.#told;
    const kOmega = (k + 1) * omega;
    const noise = (ACCEL_SIGMA / (kOmega * kOmega)) ** 2;
    const biased = k === 0 && axis < 2 ? BIAS_SIGMA / (omega * omega) : 0;
    let cc = 0;
    let cs = 0;
    let ss = 0;
    let c = 0;
    let s = 0;
    for (let i = 0; i < whole.length; i++) {
      if (whole[i]! < WHOLE_SHARE) continue;
      const force = (i * Channel.COUNT + Channel.FORCE + axis) * size + 1 + 2 * k;
      const place = force + Channel.PLACE * size;
      const angle = (i * Channel.COUNT + Channel.ANGLE) * size + 1;
      // A harmonic c cos + s sin is the complex number c - i s.
      const toldC =
        this.#real * coefficients[force]! + this.#imaginary * coefficients[force + 1]! - coefficients[place]!;
      const toldS =
        this.#real * coefficients[force + 1]! -
        this.#imaginary * coefficients[force]! -
        coefficients[place + 1]!;
      const biasC = biased * coefficients[angle]!;
      const biasS = biased * coefficients[angle + 1]!;
      const variance = noise + this.#shapeVariance[i]!;
      const weight = whole[i]! / variance;
      const over = weight / (biasC * biasC + biasS * biasS + variance);
      const wcc = weight - over * biasC * biasC;
      const wcs = -over * biasC * biasS;
      const wss = weight - over * biasS * biasS;
      cc += wcc;
      cs += wcs;
      ss += wss;
      c += wcc * toldC + wcs * toldS;
      s += wcs * toldC + wss * toldS;
      const at = 5 * i;
      told[at] = toldC;
      told[at + 1] = toldS;
      told[at + 2] = wcc;
      told[at + 3] = wcs;
      told[at + 4] = wss;
    }
    const determinant = cc * ss - cs * cs;
    const noseC = determinant > 0 ? (ss * c - cs * s) / determinant : 0;
    const noseS = determinant > 0 ? (cc * s - cs * c) / determinant : 0;
    const at = 2 * (axis * HARMONICS + k);
    this.harmonics[at] = noseC;
    this.harmonics[at + 1] = noseS;
    this.#judge(fit, whole, k, axis, noseC, noseS);
  }

  /** Sets what the sensors tell against the nose found, beside the motion that nose and shape give each. */
  #judge(fit: HarmonicFit, whole: Float64Array, k: number, axis: number, noseC: number, noseS: number): void {
    const { coefficients, size } = fit;
    const told = this.#told;
    for (let i = 0; i < whole.length; i++) {
      if (whole[i]! < WHOLE_SHARE) continue;
      const at = 5 * i;
      const place = (i * Channel.COUNT + Channel.PLACE + axis) * size + 1 + 2 * k;
      this.#apart += form(told, at + 2, told[at]! - noseC, told[at + 1]! - noseS);
      this.#motion += form(told, at + 2, coefficients[place]! + noseC, coefficients[place + 1]! + noseS);
    }
  }
}

/** The quadratic form of a symmetric 2 x 2 matrix (cc, cs, ss at `at`) and a vector. */
function form(m: Float64Array, at: number, c: number, s: number): number {
  return m[at]! * c * c + 2 * m[at + 1]! * c * s + m[at + 2]! * s * s;
}
