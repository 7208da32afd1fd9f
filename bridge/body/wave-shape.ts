/**
 * What the travelling wave is between the sensors, over what the smooth interpolation makes of it.
 *
 * Each harmonic's complex amplitude along the body is turned back by the phase that a wave of one wavelength has gained
 * there (h times the fundamental's); the rest, which changes little from sensor to sensor, is interpolated by a spline
 * and turned forth again. So amplitude and phase are interpolated, the phase unwrapped by the wavelength, and where the
 * amplitude passes zero nothing goes wrong. The wavelength is that of the least squares of the phase steps between
 * neighbours, weighted by amplitude; it is sought from a quarter wavelength a gap towards the tail, so that a step is
 * told from its alias between a quarter noseward and three quarters tailward.
 *
 * At every sensor the difference to the smooth interpolation is zero.
 */
import { stationOf } from "./between.ts";
import { NATURAL, Spline } from "./spline.ts";
import { HARMONICS, PARTS } from "./wave-fit.ts";

/** Parabola at either end: the amplitude of a swimmer's wave is near one (Videler 1993, Fish Swimming, from memory). */
const PARABOLA = 1;
/** Sensors one gap apart by this share of a wavelength are as far apart as the wave can be followed ... */
const FARTHEST = 0.5;
/** ... and beyond this it is dropped; likewise when the phase runs to the nose by as much. */
const TOO_FAR_BY = 0.05;
/** Least-squares steps to the wavelength: the second changes little, the third nothing. */
const ROUNDS = 3;
/** Agreement of the phase steps (mean cosine of what is left): at the lower a harmonic is dropped, at the upper whole. */
const DISAGREE = 0.5;
const AGREE = 0.8;

export class WaveShape {
  /** 0..1: whether the wave can be followed from sensor to sensor. */
  followed = 0;
  /** rad per body length by which the fundamental's phase falls towards the tail. */
  #waveNumber = 0;
  readonly #stations: readonly number[];
  readonly #smooth: Spline;
  readonly #wave: Spline;
  readonly #left: Uint16Array;
  /** Of the gaps left, as a share of the body. */
  #medianGap = 0;

  // PARTS a sensor left.
  readonly #values: Float64Array;
  readonly #steps: Float64Array;
  readonly #slopes: Float64Array;
  /** The same, turned back. */
  readonly #turnedValues: Float64Array;
  readonly #turnedSteps: Float64Array;
  readonly #turnedSlopes: Float64Array;
  /** Cosine and sine by harmonic. */
  readonly #turn = new Float64Array(2 * HARMONICS);
  /** By harmonic: how far it is trusted. */
  readonly #trusted = new Float64Array(HARMONICS);
  /** PARTS a place: the wave less the smooth interpolation. */
  readonly #table: Float64Array;
  readonly #placeCount: number;
  /** The next place to be renewed. */
  #next = 0;

  constructor(stations: readonly number[], placeCount: number) {
    const parts = () => new Float64Array(PARTS * (stations.length + 1));
    this.#stations = stations;
    this.#placeCount = placeCount;
    this.#smooth = new Spline({ stations, placeCount, endWeight: NATURAL });
    this.#wave = new Spline({ stations, placeCount, endWeight: PARABOLA });
    this.#left = new Uint16Array(stations.length);
    this.#values = parts();
    this.#steps = parts();
    this.#slopes = parts();
    this.#turnedValues = parts();
    this.#turnedSteps = parts();
    this.#turnedSlopes = parts();
    this.#table = new Float64Array(PARTS * placeCount);
  }

  /** @param left indices of the sensors left; the first `count` of the array, at least one */
  place(left: Uint16Array, count: number): void {
    this.#left.set(left);
    this.#smooth.place(left, count);
    this.#wave.place(left, count);
    const gaps = this.#smooth.widths.slice(0, count - 1).sort();
    this.#medianGap = gaps[gaps.length >> 1] ?? 1;
  }

  /** Renews the table at once. @param amplitudes PARTS a sensor, rad */
  renew(amplitudes: Float64Array): void {
    this.#next = 0;
    this.renewSome(amplitudes, this.#placeCount);
  }

  /** Goes on renewing the table, `places` of it; once through, the newest amplitudes are taken. */
  renewSome(amplitudes: Float64Array, places: number): void {
    if (this.#next === 0) this.#take(amplitudes);
    const end = Math.min(this.#next + places, this.#placeCount);
    for (let place = this.#next; place < end; place++) this.#renewPlace(place);
    this.#next = end === this.#placeCount ? 0 : end;
  }

  /**
   * Writes what the wave adds to the smooth interpolation at a place: rad about the body's lateral and dorso-ventral axis
   * there.
   * @param phasors cosine and negative sine of the phase times 1, 2, ... HARMONICS
   * @param out two slots from `outAt` on
   */
  at(place: number, phasors: Float64Array, out: Float64Array, outAt: number): void {
    const table = this.#table;
    let lateral = 0;
    let dorsoVentral = 0;
    for (let i = 0, at = place * PARTS; i < 2 * HARMONICS; i++, at++) {
      lateral += table[at] * phasors[i];
      dorsoVentral += table[at + 2 * HARMONICS] * phasors[i];
    }
    out[outAt] = lateral;
    out[outAt + 1] = dorsoVentral;
  }

  /** The same at all odd places, two slots each; written out, since this is every sweep's. */
  oddPlaces(phasors: Float64Array, out: Float64Array): void {
    const t = this.#table;
    const a = phasors[0];
    const b = phasors[1];
    const c = phasors[2];
    const d = phasors[3];
    const e = phasors[4];
    const f = phasors[5];
    for (let to = 0, i = PARTS; to + 1 < out.length; to += 2, i += 2 * PARTS) {
      out[to] = a * t[i] + b * t[i + 1] + c * t[i + 2] + d * t[i + 3] + e * t[i + 4] + f * t[i + 5];
      out[to + 1] = a * t[i + 6] + b * t[i + 7] + c * t[i + 8] + d * t[i + 9] + e * t[i + 10] + f * t[i + 11];
    }
  }

  #take(amplitudes: Float64Array): void {
    const { count } = this.#smooth;
    const values = this.#values;
    for (let k = 0; k < count; k++) {
      const from = PARTS * this.#left[k];
      for (let part = 0; part < PARTS; part++) values[PARTS * k + part] = amplitudes[from + part];
    }
    this.#findWaveNumber();
    for (let k = 0; k < count; k++) this.#turnBack(k);
    for (let i = 0; i < PARTS * (count - 1); i++) {
      this.#steps[i] = values[i + PARTS] - values[i];
      this.#turnedSteps[i] = this.#turnedValues[i + PARTS] - this.#turnedValues[i];
    }
    this.#smooth.slopes(this.#steps, PARTS, this.#slopes);
    this.#wave.slopes(this.#turnedSteps, PARTS, this.#turnedSlopes);
  }

  #findWaveNumber(): void {
    const { widths, count } = this.#smooth;
    const gap = this.#medianGap;
    this.#waveNumber = Math.PI / 2 / gap;
    for (let round = 0; round < ROUNDS; round++) {
      let left = 0;
      let squares = 0;
      for (let k = 0; k + 1 < count; k++) {
        const weight = widths[k] * this.#stepStrength(k, 1);
        left += weight * this.#phaseLeft(k, 1);
        squares += weight * widths[k];
      }
      if (squares > 0) this.#waveNumber -= left / squares;
    }
    const wavelengths = (this.#waveNumber * gap) / (2 * Math.PI);
    const near = 1 - Math.max(0, wavelengths - FARTHEST, -wavelengths) / TOO_FAR_BY;
    for (let harmonic = 1; harmonic <= HARMONICS; harmonic++)
      this.#trusted[harmonic - 1] = ramp(this.#agreement(harmonic), DISAGREE, AGREE);
    this.followed = count > 2 ? Math.max(0, Math.min(near, this.#trusted[0])) : 0;
  }

  #agreement(harmonic: number): number {
    let sum = 0;
    let whole = 0;
    for (let k = 0; k + 1 < this.#smooth.count; k++) {
      const weight = this.#stepStrength(k, harmonic);
      sum += weight * Math.cos(this.#phaseLeft(k, harmonic));
      whole += weight;
    }
    return whole > 0 ? sum / whole : 0;
  }

  /** Phase step of a harmonic from the k-th sensor left to the next, less what the wave number says, rad in ±π. */
  #phaseLeft(k: number, harmonic: number): number {
    const turned = harmonic * this.#waveNumber * this.#smooth.widths[k];
    const real = this.#product(k, harmonic, false);
    const imaginary = this.#product(k, harmonic, true);
    const cosine = Math.cos(turned);
    const sine = Math.sin(turned);
    return Math.atan2(imaginary * cosine + real * sine, real * cosine - imaginary * sine);
  }

  #stepStrength(k: number, harmonic: number): number {
    const real = this.#product(k, harmonic, false);
    const imaginary = this.#product(k, harmonic, true);
    return Math.sqrt(real * real + imaginary * imaginary);
  }

  /** The next sensor's amplitude times the conjugate of this one's, both axes together: real or imaginary part. */
  #product(k: number, harmonic: number, imaginary: boolean): number {
    const values = this.#values;
    let sum = 0;
    for (let axis = 0; axis < 2; axis++) {
      const at = PARTS * k + 2 * (axis * HARMONICS + harmonic - 1);
      const next = at + PARTS;
      sum += imaginary
        ? values[next + 1] * values[at] - values[next] * values[at + 1]
        : values[next] * values[at] + values[next + 1] * values[at + 1];
    }
    return sum;
  }

  #turnBack(k: number): void {
    const station = this.#stations[this.#left[k]];
    setPhasors(this.#turn, 1, this.#waveNumber * station);
    for (let part = 0; part < PARTS; part += 2) {
      const at = PARTS * k + part;
      const cosine = this.#turn[part % (2 * HARMONICS)];
      const sine = this.#turn[(part % (2 * HARMONICS)) + 1];
      this.#turnedValues[at] = this.#values[at] * cosine - this.#values[at + 1] * sine;
      this.#turnedValues[at + 1] = this.#values[at] * sine + this.#values[at + 1] * cosine;
    }
  }

  #renewPlace(place: number): void {
    const { base, ofStep, ofSlope, ofNextSlope } = this.#smooth;
    const k = PARTS * base[place];
    const step = ofStep[place];
    const slope = ofSlope[place];
    const nextSlope = ofNextSlope[place];
    const values = this.#values;
    const steps = this.#steps;
    const slopes = this.#slopes;
    const turnedValues = this.#turnedValues;
    const turnedSteps = this.#turnedSteps;
    const turnedSlopes = this.#turnedSlopes;
    const turn = this.#turn;
    // The weights of the wave's spline are those of the smooth one: both have the same stations.
    setPhasors(turn, 1, this.#waveNumber * stationOf(place, this.#placeCount));
    for (let part = 0, i = k, at = PARTS * place; part < PARTS; part += 2, i += 2, at += 2) {
      const cosine = turn[part % (2 * HARMONICS)];
      const sine = turn[(part % (2 * HARMONICS)) + 1];
      const trusted = this.#trusted[(part >> 1) % HARMONICS];
      const real =
        turnedValues[i] +
        step * turnedSteps[i] +
        slope * turnedSlopes[i] +
        nextSlope * turnedSlopes[i + PARTS];
      const imaginary =
        turnedValues[i + 1] +
        step * turnedSteps[i + 1] +
        slope * turnedSlopes[i + 1] +
        nextSlope * turnedSlopes[i + 1 + PARTS];
      const smoothReal = values[i] + step * steps[i] + slope * slopes[i] + nextSlope * slopes[i + PARTS];
      const smoothImaginary =
        values[i + 1] + step * steps[i + 1] + slope * slopes[i + 1] + nextSlope * slopes[i + 1 + PARTS];
      this.#table[at] = trusted * (real * cosine + imaginary * sine - smoothReal);
      this.#table[at + 1] = trusted * (imaginary * cosine - real * sine - smoothImaginary);
    }
  }
}

/** Writes `scale` times cosine and sine of the angle times 1, 2, ... HARMONICS: each is the one before it turned on. */
export function setPhasors(out: Float64Array, scale: number, angle: number): void {
  const cosine = Math.cos(angle);
  const sine = Math.sin(angle);
  out[0] = scale * cosine;
  out[1] = scale * sine;
  for (let i = 2; i < 2 * HARMONICS; i += 2) {
    out[i] = cosine * out[i - 2] - sine * out[i - 1];
    out[i + 1] = sine * out[i - 2] + cosine * out[i - 1];
  }
}

function ramp(value: number, from: number, to: number): number {
  return Math.max(0, Math.min(1, (value - from) / (to - from)));
}
