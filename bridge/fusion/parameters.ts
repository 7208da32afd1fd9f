/**
 * What can be chosen about the fusion; none of it depends on the sampling rate.
 *
 * The values are the published ones of Laidig & Seel, "VQF: Highly accurate IMU orientation
 * estimation with bias estimation and magnetic disturbance rejection", Information Fusion 91 (2023) 187-204, given from memory,
 * except where one is called ours.
 */
import { RAD_PER_DEG } from "../numeric/units.ts";

/**
 * Uncertainty of the field's direction beside the one before a clipped stretch or a gap, rad: noise, timing, uneven field.
 * Ours, no source: a twentieth of the norm, a few times a magnetometer's noise.
 */
export const FIELD_SHARE = 0.05;

export interface FusionParameters {
  /**
   * Time constant of the inclination correction, s. Small: gyroscope errors fade sooner, but the body's accelerations
   * leak into pitch and roll. Large: the other way round.
   */
  readonly accelTauS: number;
  /** Time constant of the heading correction, s. Small: magnetic noise and disturbance leak into heading. Large: drift lasts. */
  readonly magTauS: number;

  /** Standard deviation of the inclination in steady, gentle motion, rad. Ours: bias in motion over the time constant, and noise. */
  readonly inclinationSigma: number;
  /** How much of the direction error of a single specific force its average keeps: tilt per acceleration / g. Ours, no source. */
  readonly accelerationShare: number;
  /**
   * Standard deviation of the specific force's direction averaged over the time constant where nothing is known of the
   * body's acceleration, rad: at a start; up to this the inclination counts as settled. Ours, no source: a mean
   * acceleration of 0.5 m/s².
   */
  readonly accelSigma: number;
  /**
   * Standard deviation of a settled heading in an even field, rad; it decides how far a clipped stretch or a gap opens the
   * heading's correction. Small: opens more readily. Ours, no source: what a calibrated magnetometer is good for.
   */
  readonly headingSigma: number;

  /** Standard deviation of the gyroscope's bias at the start, rad/s. Small: a real bias is found late. */
  readonly biasSigmaStart: number;
  /** Time in which the bias's standard deviation grows from 0 to 0.1 °/s, s. Small: follows temperature sooner, with more noise. */
  readonly biasForgettingS: number;
  /** Greatest bias that is believed, per axis, rad/s; slow turns up to this rate may be taken for bias. */
  readonly biasLimit: number;
  /** Standard deviation of the converged bias while moving, rad/s. Small: trusts inclination corrections less. */
  readonly biasSigmaMotion: number;
  /** Weight of the assumption that the bias about the vertical is zero, seen against the motion update. 0: none. */
  readonly biasVerticalWeight: number;
  /** Standard deviation of the converged bias at rest, rad/s. */
  readonly biasSigmaRest: number;
  /**
   * Span of readings that make one measurement of the bias, s; a single reading where the interval is longer. Small: more
   * work. Large: fast turns blur. Ours, no source: well below the time constant of the inclination correction.
   */
  readonly biasSpanS: number;
  /** Span of field readings whose mean is judged, and corrects the heading, s. Ours, no source: a fast beat's tenth. */
  readonly fieldSpanS: number;

  /** Rest is believed after this long, s. Small: a slow even turn may pass for rest. */
  readonly restMinS: number;
  /** Time constant of the low-pass that readings at rest are compared with, s. */
  readonly restTauS: number;
  /** Span of readings whose mean makes one step of that low-pass, s. Ours, no source: well below its time constant. */
  readonly restSpanS: number;
  /** Greatest deviation of the angular rate from its low-pass at rest, rad/s. */
  readonly restRateLimit: number;
  /** Greatest deviation of the specific force from its low-pass at rest, m/s². */
  readonly restAccelLimit: number;

  /** Time constant that smooths the field's norm and dip before they are judged, s. */
  readonly magCurrentTauS: number;
  /** Time constant with which the reference norm and dip follow an undisturbed field, s. */
  readonly magReferenceTauS: number;
  /** The field is the reference's when its norm lies within this share of it ... */
  readonly magNormShare: number;
  /** ... and its dip within this angle, rad. */
  readonly magDipLimit: number;
  /** A steady other field becomes the reference after this much time of movement, s ... */
  readonly magNewS: number;
  /** ... and the very first one after this much. */
  readonly magFirstS: number;
  /** Movement, for this purpose: a low-passed angular rate of at least this, rad/s. */
  readonly magNewMinRate: number;
  /** The field counts as undisturbed only after this long within the limits, s. */
  readonly magMinUndisturbedS: number;
  /** A disturbed field is ignored for at most this long, s, and then followed more slowly. */
  readonly magMaxRejectionS: number;
  /** How much more slowly; and how fast undisturbed time wins back the allowance for rejection. */
  readonly magRejectionFactor: number;

  /**
   * Time constant with which the slope of the angular rate fades in a prediction across lost samples, s. Small: the last
   * rate is held. Large: fast tailbeats overshoot. Ours, no source: on a sine a prediction with slope is nearer than one
   * without for about half a period, which is 0.1 s at five beats a second.
   */
  readonly slopeFadeS: number;
  /**
   * Without readings for this long the orientation is lost: prediction stops, and the next reading starts anew, s. Ours,
   * no source: about one slow tailbeat.
   */
  readonly lostAfterS: number;
  /** Without a magnetometer reading for this long the heading counts as unaided, s. Ours, no source. */
  readonly magMissingAfterS: number;
}

export const DEFAULT_PARAMETERS: FusionParameters = {
  accelTauS: 3,
  magTauS: 9,

  inclinationSigma: 0.4 * RAD_PER_DEG,
  accelerationShare: 0.03,
  accelSigma: 0.05,
  headingSigma: 2 * RAD_PER_DEG,

  biasSigmaStart: 0.5 * RAD_PER_DEG,
  biasForgettingS: 100,
  biasLimit: 2 * RAD_PER_DEG,
  biasSigmaMotion: 0.1 * RAD_PER_DEG,
  biasVerticalWeight: 1e-4,
  biasSigmaRest: 0.03 * RAD_PER_DEG,
  biasSpanS: 0.1,
  fieldSpanS: 0.02,

  restMinS: 1.5,
  restTauS: 0.5,
  restSpanS: 0.05,
  restRateLimit: 2 * RAD_PER_DEG,
  restAccelLimit: 0.5,

  magCurrentTauS: 0.05,
  magReferenceTauS: 20,
  magNormShare: 0.1,
  magDipLimit: 10 * RAD_PER_DEG,
  magNewS: 20,
  magFirstS: 5,
  magNewMinRate: 20 * RAD_PER_DEG,
  magMinUndisturbedS: 0.5,
  magMaxRejectionS: 60,
  magRejectionFactor: 2,

  slopeFadeS: 0.1,
  lostAfterS: 1,
  magMissingAfterS: 1,
};
