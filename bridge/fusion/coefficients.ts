/**
 * Numbers that follow from the parameters and a step length, worked out before the first sweep: one set for each whole
 * multiple of the nominal interval, so that lost samples and slower sensors cost nothing extra.
 */
import { lowPassGains } from "../numeric/low-pass.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { FusionParameters } from "./parameters.ts";

/** Multiples of the nominal interval that are worked out ahead. */
const MULTIPLES = 64;
/** A step within this share of a multiple uses its set: cut-offs then differ by the same share, times are never touched. */
const SAME_STEP = 0.01;
/** The bias's standard deviation grows from zero to this in the forgetting time, rad/s. */
const FORGOTTEN_SIGMA = 0.1 * RAD_PER_DEG;

/** Where things lie in a set: flat doubles, as the record. */
export enum Gain {
  /** The step length, s. */
  STEP = 0,
  /** Low-pass gains for the specific force, for rest, and for the current field. */
  FORCE = STEP + 1,
  REST = FORCE + 6,
  FIELD = REST + 6,
  /** Share of the heading's disagreement with the field that one step takes away in the steady state. */
  HEADING = FIELD + 6,
  /** Variance of the field's direction as one reading of that step shows it, rad². */
  HEADING_NOISE = HEADING + 1,
  /** Share of the reference field's difference from the current field that one step takes away. */
  REFERENCE = HEADING_NOISE + 1,
  /** The same of the mean square of the acceleration. */
  ACCELERATION = REFERENCE + 1,
  /** Variance that the bias gains in the step, (rad/s)². */
  BIAS_NOISE = ACCELERATION + 1,
  /** Variances of one step's measurement of the bias, (rad/s)²: horizontal and vertical in motion, and at rest. */
  MOTION_VARIANCE = BIAS_NOISE + 1,
  VERTICAL_VARIANCE = MOTION_VARIANCE + 1,
  REST_VARIANCE = VERTICAL_VARIANCE + 1,

  SIZE = REST_VARIANCE + 1,
}

export class Coefficients {
  readonly #parameters: FusionParameters;
  /** By multiple, from 1. */
  readonly #multiples: readonly Float64Array[];
  readonly #odd = new Float64Array(Gain.SIZE);

  constructor(parameters: FusionParameters, rateHz: number) {
    this.#parameters = parameters;
    this.#multiples = Array.from({ length: MULTIPLES + 1 }, (_, n) => {
      const gains = new Float64Array(Gain.SIZE);
      writeGains(gains, parameters, Math.max(n, 1) / rateHz);
      return gains;
    });
  }

  /**
   * The set for the step length at `at` in a record (s, above zero). That of an odd length, which a steady hub never gives,
   * is worked out on the spot and borrowed: it changes with the next call.
   */
  forStep(record: Float64Array, at: number): Float64Array {
    const stepS = record[at]!;
    const nominal = this.#multiples[1]!;
    const nominalS = nominal[Gain.STEP]!;
    if (Math.abs(stepS - nominalS) <= SAME_STEP * nominalS) return nominal;
    const multiple = Math.round(stepS / nominalS);
    const off = Math.abs(stepS - multiple * nominalS);
    if (multiple >= 1 && multiple <= MULTIPLES && off <= SAME_STEP * stepS) return this.#multiples[multiple]!;
    writeGains(this.#odd, this.#parameters, stepS);
    return this.#odd;
  }
}

function writeGains(gains: Float64Array, parameters: FusionParameters, stepS: number): void {
  const noise = (FORGOTTEN_SIGMA ** 2 * stepS) / parameters.biasForgettingS;
  gains[Gain.STEP] = stepS;
  lowPassGains(gains, Gain.FORCE, parameters.accelTauS, stepS);
  lowPassGains(gains, Gain.REST, parameters.restTauS, stepS);
  lowPassGains(gains, Gain.FIELD, parameters.magCurrentTauS, stepS);
  gains[Gain.HEADING] = firstOrderGain(parameters.magTauS, stepS);
  gains[Gain.HEADING_NOISE] = (parameters.headingSigma ** 2 * parameters.magTauS) / stepS;
  gains[Gain.REFERENCE] = firstOrderGain(parameters.magReferenceTauS, stepS);
  gains[Gain.ACCELERATION] = firstOrderGain(parameters.accelTauS, stepS);
  gains[Gain.BIAS_NOISE] = noise;
  gains[Gain.MOTION_VARIANCE] = measurementVariance(parameters.biasSigmaMotion, noise);
  gains[Gain.VERTICAL_VARIANCE] = gains[Gain.MOTION_VARIANCE]! / parameters.biasVerticalWeight;
  gains[Gain.REST_VARIANCE] = measurementVariance(parameters.biasSigmaRest, noise);
}

/** Gain of a first-order low-pass with time constant `tauS` over one step. */
function firstOrderGain(tauS: number, stepS: number): number {
  return -Math.expm1(-stepS / tauS);
}

/** The measurement variance with which a Kalman filter of this process noise converges to this standard deviation. */
function measurementVariance(sigma: number, noise: number): number {
  const variance = sigma ** 2;
  return variance ** 2 / noise + variance;
}
