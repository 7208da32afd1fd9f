/**
 * What the harmonics of the beat are at each sensor: how far the body turns there about its lateral and dorso-ventral axes
 * (y and z, its own), as complex amplitudes c of Re[c e^(j h phase)], h = 1, 2, ...
 *
 * What is fitted (numeric/harmonic-fit.ts) is the turn from one reading to the next over the phase gone by, in the sensor's
 * own axes: the slope of the angle. So no reference is needed that the body would turn away from, a steady turn is the
 * fit's mean, and headings being corrected leave no trace. The slope's harmonics over j h are the angle's. A few readings a
 * beat are enough, since all motion between them is in the turn; its mean over the phase gone by shrinks a harmonic by
 * sin x / x, x half of h times that phase, which is undone.
 */
import { HarmonicFit } from "../numeric/harmonic-fit.ts";
import { turnBetween } from "../numeric/quaternion.ts";

/** Bodies that swim bend in a fundamental and some per cent of a third harmonic; steadily bent ones in a second too. */
export const HARMONICS = 3;
/** Numbers a sensor: lateral then dorso-ventral axis, by harmonic, real and imaginary part. */
export const PARTS = 4 * HARMONICS;

const TURN = 2 * Math.PI;
/** Phase from one reading to the next, if sweeps come that often: eight readings of the third harmonic's period. */
const READING = TURN / (8 * HARMONICS);
/** A longer way says nothing about the third harmonic. */
const LONGEST_READING = TURN / 6;
/** Memory of the fit, rad: two beats, so that noise averages out and a change of pace is followed. */
const MEMORY = 2 * TURN;

export class WaveFit {
  /** PARTS numbers a sensor, rad. Borrowed. */
  readonly amplitudes: Float64Array;
  /** Beats that each sensor has been heard without a break. */
  readonly heardBeats: Float64Array;
  readonly #fit: HarmonicFit;
  readonly #before: Float64Array;
  #phase = Number.NaN;
  /** Mean phase from reading to reading. */
  #advance = 0;
  readonly #slopes: Float64Array;
  readonly #turn = new Float64Array(3);

  constructor(sensorCount: number) {
    this.amplitudes = new Float64Array(PARTS * sensorCount);
    this.heardBeats = new Float64Array(sensorCount);
    this.#before = new Float64Array(4 * sensorCount);
    this.#slopes = new Float64Array(2 * sensorCount);
    this.#fit = new HarmonicFit({ channels: 2 * sensorCount, harmonics: HARMONICS });
  }

  /** What was learned no longer holds. */
  reset(): void {
    this.#fit.reset();
    this.heardBeats.fill(0);
    this.#phase = Number.NaN;
  }

  /**
   * Takes a sweep.
   * @param phase rad, unwrapped
   * @param orientations 4 per sensor, body axes to earth
   * @param lost per sensor, 1 where it is
   * @returns true when it made a reading: `amplitudes` are new
   */
  step(phase: number, orientations: Float64Array, lost: Uint8Array): boolean {
    const advance = phase - this.#phase;
    if (advance >= 0 && advance < READING) return false;
    const whole = advance >= READING && advance <= LONGEST_READING;
    if (whole) this.#read(phase, advance, orientations, lost);
    this.#phase = phase;
    this.#before.set(orientations);
    return whole;
  }

  #read(phase: number, advance: number, orientations: Float64Array, lost: Uint8Array): void {
    for (let i = 0; i < lost.length; i++) {
      turnBetween(this.#turn, this.#before, orientations, 0, 4 * i, 4 * i);
      // The first turn after a loss leads from where the sensor was last seen.
      const heard = lost[i] === 0 && this.heardBeats[i] > 0;
      this.#slopes[2 * i] = heard ? this.#turn[1] / advance : Number.NaN;
      this.#slopes[2 * i + 1] = heard ? this.#turn[2] / advance : Number.NaN;
      this.heardBeats[i] = lost[i] === 0 ? this.heardBeats[i] + advance / TURN : 0;
    }
    const share = 1 - Math.exp(-advance / MEMORY);
    const fit = this.#fit;
    fit.step(phase - 0.5 * advance, share, this.#slopes);
    this.#advance += (share / fit.filled) * (advance - this.#advance);
    for (let harmonic = 1; harmonic <= HARMONICS; harmonic++) {
      const half = 0.5 * harmonic * this.#advance;
      const scale = -half / (Math.sin(half) * harmonic);
      for (let channel = 0; channel < this.#slopes.length; channel++) {
        const from = channel * fit.size + 2 * harmonic - 1;
        const to = 2 * (channel * HARMONICS + harmonic - 1);
        this.amplitudes[to] = scale * fit.coefficients[from + 1];
        this.amplitudes[to + 1] = scale * fit.coefficients[from];
      }
    }
  }
}
