/**
 * Numbers that follow from the parameters and a step length, worked out before the first sweep: one set for each whole
 * multiple of the nominal interval, so that lost samples and slower sensors cost nothing extra.
 */
import { LowPassGains } from "../numeric/low-pass.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { FusionParameters } from "./parameters.ts";

/** Multiples of the nominal interval that are worked out ahead. */
const MULTIPLES = 64;
/** A step within this share of a multiple uses its set: cut-offs then differ by the same share, times are never touched. */
const SAME_STEP = 0.01;
/** The bias's standard deviation grows from zero to this in the forgetting time, rad/s. */
const FORGOTTEN_SIGMA = 0.1 * RAD_PER_DEG;

/** All that a step of one length needs. */
export class StepGains {
  readonly stepS: number;
  readonly force: LowPassGains;
  readonly rest: LowPassGains;
  readonly magCurrent: LowPassGains;
  /** Share of the heading's disagreement with the field that one step takes away. */
  readonly heading: number;
  /** Share of the reference field's difference from the current field that one step takes away. */
  readonly magReference: number;
  /** Variance that the bias gains in the step, (rad/s)². */
  readonly biasNoise: number;
  /** Variances of one step's measurement of the bias, (rad/s)²: horizontal and vertical in motion, and at rest. */
  readonly motionVariance: number;
  readonly verticalVariance: number;
  readonly restVariance: number;

  constructor(parameters: FusionParameters, stepS: number) {
    this.stepS = stepS;
    this.force = new LowPassGains(parameters.accelTauS, stepS);
    this.rest = new LowPassGains(parameters.restTauS, stepS);
    this.magCurrent = new LowPassGains(parameters.magCurrentTauS, stepS);
    this.heading = firstOrderGain(parameters.magTauS, stepS);
    this.magReference = firstOrderGain(parameters.magReferenceTauS, stepS);
    this.biasNoise = (FORGOTTEN_SIGMA ** 2 * stepS) / parameters.biasForgettingS;
    this.motionVariance = measurementVariance(parameters.biasSigmaMotion, this.biasNoise);
    this.verticalVariance = this.motionVariance / parameters.biasVerticalWeight;
    this.restVariance = measurementVariance(parameters.biasSigmaRest, this.biasNoise);
  }
}

export class Coefficients {
  readonly #rateHz: number;
  readonly #parameters: FusionParameters;
  /** By multiple, from 1. */
  readonly #multiples: readonly StepGains[];

  constructor(parameters: FusionParameters, rateHz: number) {
    this.#rateHz = rateHz;
    this.#parameters = parameters;
    this.#multiples = Array.from(
      { length: MULTIPLES + 1 },
      (_, n) => new StepGains(parameters, Math.max(n, 1) / rateHz),
    );
  }

  /**
   * The set for the step length at `at` in a record (s, above zero). An odd length, which a steady hub never gives, makes
   * a set of its own.
   */
  forStep(record: Float64Array, at: number): StepGains {
    const stepS = record[at]!;
    const steps = stepS * this.#rateHz;
    const whole = Math.round(steps);
    if (whole >= 1 && whole <= MULTIPLES && Math.abs(steps - whole) <= SAME_STEP * whole)
      return this.#multiples[whole]!;
    return new StepGains(this.#parameters, stepS);
  }
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
