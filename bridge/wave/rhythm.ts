/**
 * The body's beat as it runs: its phase and frequency at every sweep, before the beat is whole, without lag.
 *
 * A phase-locked loop of second order (F. M. Gardner, "Phaselock Techniques", from memory) whose phase detector is the
 * Gauss-Newton step of a harmonic fit: how far the phase must move for mean and harmonics of all signals, as fitted over the
 * last beats (numeric/harmonic-fit.ts), to meet the newest reading best; the same error drives the fitted phase in
 * P. J. Parker, B. D. O. Anderson, "Frequency tracking of nonsinusoidal periodic signals in noise", Signal Process. 20, 1990,
 * 127-152 (from memory). A steady frequency leaves no error of phase.
 *
 * What starts the loop, and draws it while the harmonics do not yet explain the motion, is the ratio of the signals' rate
 * to their excursion, both RMS over about a beat: of a sinusoid that is its angular frequency, at once.
 *
 * Signals count by what the fit leaves of them and by the noise expected in them.
 */
import { HarmonicFit } from "../numeric/harmonic-fit.ts";
import { lowPassGains, lowPassSize, stepLowPass } from "../numeric/low-pass.ts";
import type { Sweep } from "../sweep.ts";
import { LateralSignals, SIGNAL_COUNT } from "./lateral-signals.ts";

const TURN = 2 * Math.PI;
/** Sweeps that come faster than this, s, are not all read: of the fastest beat eight a beat are enough. */
const READING_S = 0.014;
/** Beats looked for, Hz, with a margin for what is at the edge. */
const LOWEST_HZ = 0.3;
const HIGHEST_HZ = 8;
const MARGIN = 1.15;
const HARMONICS = 3;
/** Memory of the fit, beats: while it explains nothing, and what is added as it explains all. */
const LEAST_FIT_BEATS = 0.6;
const MORE_FIT_BEATS = 1.2;
/** Memory of the ratio, beats. */
const RATIO_BEATS = 0.7;
/** Natural frequency of the loop as a share of the beat's: settled within two beats. Damping 1. */
const LOOP_SHARE = 0.4;
/** Greatest error of phase that one reading may tell, rad. */
const GREATEST_ERROR = 0.5;
/** Loop and ratio further apart than this factor: the loop sits on another harmonic. */
const FAR_APART = 1.5;
/** The body beats while this share of its lateral motion is explained, and stops counting below the other. */
const BEATS_ABOVE = 0.65;
const RESTS_BELOW = 0.5;
/** A reading counts for no more of a beat than this, however long the gap before it. */
const LONGEST_STEP_BEATS = 0.1;
/** Standard deviation of what is not beat: sine of an angle (1°), of its modes (0.5°), and acceleration, m/s². Ours, no source. */
const NOISE = [0.017, 0.009, 0.009, 0.06] as const;
/** Low-pass before rates are taken: cut-off 8 Hz, s. */
const TAU_S = 0.028;

/** Record of the low-passed signals: input, filter, gains. */
const FILTER = SIGNAL_COUNT;
const SLOPES = FILTER + 1 + SIGNAL_COUNT;
const GAINS = FILTER + lowPassSize(SIGNAL_COUNT);

export class Rhythm {
  /** rad, grows by 2π a beat; where in the beat it is zero is arbitrary but stays. Runs on while there is no beat. */
  phase = 0;
  /** Share of the lateral motion that mean and harmonics explain, 0..1. */
  periodicShare = 0;

  readonly #signals: LateralSignals;
  readonly #fit = new HarmonicFit({ channels: SIGNAL_COUNT, harmonics: HARMONICS });
  #omega = TURN;
  /** From the ratio of rate to excursion. */
  #roughOmega = TURN;
  #beating = false;
  readonly #weights = new Float64Array(SIGNAL_COUNT);
  readonly #lowPass = new Float64Array(GAINS + 6);
  /** Of the low-passed signals: mean, mean square about it, mean square of the rate. */
  readonly #moments = new Float64Array(3 * SIGNAL_COUNT);
  #momentsFilled = 0;
  /** Time since the sweep that was read last, s. */
  #sinceS = 0;

  /** @param stations of the sensors, 0 nose to 1 tail tip */
  constructor(stations: readonly number[]) {
    this.#signals = new LateralSignals(stations);
  }

  /** Hz; null while the motion is not a beat of 0.3 to 8 Hz. */
  get frequencyHz(): number | null {
    return this.#beating ? this.#omega / TURN : null;
  }

  /**
   * Takes one sweep.
   * @param orientations body axes to earth, 4 a sensor
   * @param trust as in sweep.ts
   */
  step(sweep: Sweep, orientations: Float64Array, trust: Uint8Array): void {
    const { stepS } = sweep;
    this.phase += this.#omega * stepS;
    this.#sinceS += stepS;
    // Half a sweep early is nearer than half a sweep late.
    if (this.#sinceS + 0.5 * stepS < READING_S) return;
    this.#signals.step(sweep, orientations, trust, this.#sinceS);
    this.#read(this.#signals.values, this.#sinceS);
    this.#sinceS = 0;
  }

  /** @param stepS time since the reading before, s */
  #read(values: Float64Array, stepS: number): void {
    const countedS = Math.min(stepS, (LONGEST_STEP_BEATS * TURN) / this.#omega);
    const memoryBeats = LEAST_FIT_BEATS + MORE_FIT_BEATS * this.periodicShare;
    const share = 1 - Math.exp((-countedS * this.#omega) / (TURN * memoryBeats));
    this.#fit.step(this.phase, share, values);
    this.#weigh();
    this.#lock(values, countedS);
    this.#followRatio(values, stepS, countedS);
    const hz = this.#omega / TURN;
    const inRange = hz > LOWEST_HZ / MARGIN && hz < HIGHEST_HZ * MARGIN;
    this.#beating = inRange && this.periodicShare > (this.#beating ? RESTS_BELOW : BEATS_ABOVE);
  }

  /** What each signal counts, and what of all is explained. */
  #weigh(): void {
    const { residual, filled } = this.#fit;
    let explained = 0;
    let whole = 0;
    for (let c = 0; c < SIGNAL_COUNT; c++) {
      const noise = NOISE[c]! * NOISE[c]!;
      const left = residual[2 * c]!;
      const variation = residual[2 * c + 1]!;
      const weight = 1 / (noise + left);
      this.#weights[c] = weight;
      explained += weight * Math.max(0, variation - left);
      whole += weight * (variation + noise);
    }
    // A fit over less than a beat explains anything.
    this.periodicShare = Math.min(1, 2 * filled) * (explained / whole);
  }

  /** Moves phase and frequency to where the fit meets the newest reading. */
  #lock(values: Float64Array, stepS: number): void {
    const fit = this.#fit;
    let slopes = 0;
    let errors = 0;
    for (let c = 0; c < SIGNAL_COUNT; c++) {
      const error = values[c]! - fit.fitted[c]!;
      if (Number.isNaN(error)) continue;
      errors += this.#weights[c]! * error * fit.slope(c);
      slopes += this.#weights[c]! * fit.meanSquareSlope(c);
    }
    if (!(slopes > 0)) return;
    const ahead = Math.max(-GREATEST_ERROR, Math.min(GREATEST_ERROR, errors / slopes)) * this.periodicShare;
    const natural = LOOP_SHARE * this.#omega;
    this.phase += 2 * natural * stepS * ahead;
    this.#omega += natural * natural * stepS * ahead;
  }

  /** Ratio of rate to excursion; draws the frequency towards it while the fit does not explain the motion. */
  #followRatio(values: Float64Array, stepS: number, countedS: number): void {
    const record = this.#lowPass;
    const moments = this.#moments;
    for (let c = 0; c < SIGNAL_COUNT; c++) if (!Number.isNaN(values[c]!)) record[c] = values[c]!;
    if (record[GAINS] !== stepS) lowPassGains(record, GAINS, TAU_S, stepS);
    stepLowPass(record, FILTER, SIGNAL_COUNT, 0, record, GAINS);
    const share = 1 - Math.exp((-countedS * this.#roughOmega) / (TURN * RATIO_BEATS));
    this.#momentsFilled += share * (1 - this.#momentsFilled);
    const part = share / this.#momentsFilled;
    let logs = 0;
    let count = 0;
    for (let c = 0, at = 0; c < SIGNAL_COUNT; c++, at += 3) {
      const value = record[FILTER + 1 + c]!;
      const rate = record[SLOPES + c]! / TAU_S;
      moments[at]! += part * (value - moments[at]!);
      const apart = value - moments[at]!;
      moments[at + 1]! += part * (apart * apart - moments[at + 1]!);
      moments[at + 2]! += part * (rate * rate - moments[at + 2]!);
      if (!(moments[at + 1]! > 0 && moments[at + 2]! > 0)) continue;
      const excursion = moments[at + 1]!;
      // Squared: what drifts by less than the noise says nothing.
      const certain = (excursion / (excursion + NOISE[c]! * NOISE[c]!)) ** 2;
      logs += certain * Math.log(moments[at + 2]! / excursion);
      count += certain;
    }
    if (!(count > 0)) return;
    const rough = Math.exp((0.5 * logs) / count);
    this.#roughOmega = Math.max(TURN * LOWEST_HZ, Math.min(TURN * HIGHEST_HZ, rough));
    const ratio = this.#roughOmega / this.#omega;
    const apart = ratio > FAR_APART || ratio < 1 / FAR_APART;
    const pull = apart ? 1 : Math.max(0, 1 - this.periodicShare / BEATS_ABOVE);
    this.#omega += Math.min(1, pull * countedS * this.#roughOmega) * (this.#roughOmega - this.#omega);
  }
}
