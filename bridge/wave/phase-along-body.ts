/**
 * The phase of the fundamental along the body: how late each point swings, how long the wave is.
 *
 * y(s, t) = A(s) cos(2 pi f t - lag(s)). The lag is unwrapped from the tail tip forwards, from point to point, by less
 * than half a turn each. *Wavelength* is the length along the body over which the lag grows by one turn, from the
 * straight line through the lags of the rear part, each weighted by the square of its amplitude, which is the inverse of
 * its variance; negative when the wave runs from tail to nose. *Phase lag* is the tail tip's behind the nose, per body
 * length: where the nose hardly swings, that behind the foremost point that does, over the way between the two.
 */
import { type CycleFit, TERMS } from "./cycle-fit.ts";

/** A point's swing is known when it is this many times its standard error ... */
const STANDARD_ERRORS = 3;
/** ... and no less than this share of the length: a degree's error of one sensor in six moves its piece by more. */
const LEAST_SWING_SHARE = 0.002;
/** The wavelength is read behind this station: in front many bodies swing against the wave as one stiff piece. */
const REAR_FROM = 0.4;
/** The line through the lags needs this share of the length. */
const LEAST_REAR_SHARE = 0.25;

export class PhaseAlongBody {
  /** Swing of the fundamental to either side, m. */
  readonly amplitudeM: Float64Array;
  /** Unwrapped, rad, 0 at the tail tip; NaN in front of the foremost point whose swing is known. */
  readonly lag: Float64Array;
  /** Tail tip behind nose, rad per body length; NaN when unknown. */
  phaseLag = Number.NaN;
  /** m; NaN when unknown. */
  wavelengthM = Number.NaN;
  /** Index of the foremost point from which on all swing beyond the noise; the count of points when the tail does not. */
  foremost = 0;
  readonly #lengthM: number;

  constructor(points: number, lengthM: number) {
    this.amplitudeM = new Float64Array(points);
    this.lag = new Float64Array(points);
    this.#lengthM = lengthM;
  }

  /** Whether the swing of `point` is known from the noise. */
  swings(point: number, fit: CycleFit): boolean {
    const error = fit.residual[point] * Math.sqrt(2 / fit.sweeps);
    const least = Math.max(STANDARD_ERRORS * error, LEAST_SWING_SHARE * this.#lengthM);
    return this.amplitudeM[point] > least;
  }

  /** Reads the first series of `fit`, one a point, nose first. */
  read(fit: CycleFit): void {
    const { terms } = fit;
    const points = this.lag.length;
    for (let point = 0, at = 1; point < points; point++, at += TERMS) {
      this.amplitudeM[point] = Math.hypot(terms[at], terms[at + 1]);
    }
    this.#unwrap(fit);
    const last = points - 1;
    const { foremost } = this;
    this.phaseLag = foremost < last ? (-this.lag[foremost] * last) / (last - foremost) : Number.NaN;
    this.wavelengthM = this.#wavelength();
  }

  /** Whether the line through the lags has enough of the body to lean on. */
  get enough(): boolean {
    const last = this.lag.length - 1;
    return last - this.foremost >= LEAST_REAR_SHARE * last;
  }

  /** How far the lag grows between two stations, rad, whatever its sign; NaN where it is not known. */
  growth(from: number, to: number): number {
    return Math.abs(this.#lagAt(to) - this.#lagAt(from));
  }

  #lagAt(station: number): number {
    const last = this.lag.length - 1;
    const before = Math.min(last - 1, Math.floor(station * last));
    const share = station * last - before;
    return this.lag[before] + share * (this.lag[before + 1] - this.lag[before]);
  }

  #unwrap(fit: CycleFit): void {
    const { terms } = fit;
    const { lag } = this;
    const last = lag.length - 1;
    lag.fill(Number.NaN);
    this.foremost = last + 1;
    if (!this.swings(last, fit)) return;
    lag[last] = 0;
    this.foremost = last;
    for (let point = last - 1; point >= 0 && this.swings(point, fit); point--) {
      const at = point * TERMS + 1;
      const behind = at + TERMS;
      // The angle from this point's amplitude c - i s to that of the one behind.
      const along = terms[at] * terms[behind] + terms[at + 1] * terms[behind + 1];
      const across = terms[at] * terms[behind + 1] - terms[at + 1] * terms[behind];
      lag[point] = lag[point + 1] - Math.atan2(across, along);
      this.foremost = point;
    }
  }

  #wavelength(): number {
    const { lag, amplitudeM } = this;
    const last = lag.length - 1;
    let weights = 0;
    let sumS = 0;
    let sumLag = 0;
    let sumSS = 0;
    let sumSLag = 0;
    for (let point = Math.max(this.foremost, Math.ceil(REAR_FROM * last)); point <= last; point++) {
      const weight = amplitudeM[point] ** 2;
      const s = (point / last) * this.#lengthM;
      weights += weight;
      sumS += weight * s;
      sumLag += weight * lag[point];
      sumSS += weight * s * s;
      sumSLag += weight * s * lag[point];
    }
    const slope = (weights * sumSLag - sumS * sumLag) / (weights * sumSS - sumS * sumS);
    return (2 * Math.PI) / slope;
  }
}
