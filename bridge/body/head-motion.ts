/**
 * How the nose moves about its mean place while the body beats: sway (to the left), heave (up) and surge (ahead), without
 * drift and without lag.
 *
 * At every sensor, specific force turned into earth axes is gravity plus the acceleration of the nose plus the second
 * derivative of the midline from the nose to there. Mean and harmonics of the beat are fitted to both (adaptive Fourier
 * estimation, numeric/harmonic-fit.ts); at harmonic k of a beat of angular frequency w a second derivative is a factor
 * -(k w)², so that every sensor tells
 *
 *     nose_k = -acceleration_k / (k w)² - midline_k,
 *
 * and nose-solver.ts makes one of all. Nothing is integrated over time: gravity and slow errors are in the mean, which is
 * left out, and the displacement is about the nose's own mean place.
 *
 * Where the accelerations do not confirm the shape (a file whose accelerometers hold gravity alone, say), the nose is held
 * still; likewise while there is no beat, and where fewer than two sensors have whole readings. It comes and goes gradually,
 * over a beat.
 */
import { HarmonicFit } from "../numeric/harmonic-fit.ts";
import { rotate } from "../numeric/quaternion.ts";
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_INERTIAL, type Sweep, TRUST } from "../sweep.ts";
import { Channel, HARMONICS, NoseSolver } from "./nose-solver.ts";

export interface HeadMotionOptions {
  /** Of each sensor, 0 nose to 1 tail tip, ascending. */
  readonly stations: readonly number[];
  readonly lengthM: number;
  /** Of the midline. */
  readonly pointCount: number;
  /** How long before the time of the orientations specific forces are read, s. */
  readonly delayS: number;
  /** Time constant of the fusion's low-pass of the specific force, s. */
  readonly levelTauS: number;
}

/** The beat at a sweep. */
export interface BeatNow {
  /** rad, unwrapped. */
  readonly phase: number;
  readonly frequencyHz: number | null;
}

/** Why the nose is held still; null while it is followed. */
export type HeldNose = "no beat" | "readings missing" | "sensors disagree" | null;

/** Memory of the fit, beats. */
const FIT_BEATS = 2;
/** Readings taken, and noses found, a beat: eight of the third harmonic, and the work does not grow with the rate. */
const FITS_A_BEAT = 24;
const FITS_A_SOLUTION = 4;
/** A reading counts for no more of a beat than this, however long the gap before it. */
const LONGEST_STEP_BEATS = 0.1;
/** Share of the sensors' motion that the accelerations may fail to confirm, squared. Ours, no source: of gravity alone, all. */
const UNCONFIRMED = 0.2;
/** Time constants in beats: of the harmonics shown, so that solutions join smoothly, and of the nose's coming and going. */
const SMOOTH_BEATS = 0.2;
const BLEND_BEATS = 0.5;
/** Below this share of its motion the nose is as good as still. */
const STILL = 1e-4;
const SPOILT = CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;
const TURN = 2 * Math.PI;

export class HeadMotion {
  /** Surge (ahead), sway (left) and heave (up) of the nose about its mean place, m, travel axes. Borrowed. */
  readonly displacement = new Float64Array(3);
  /** As of the last step. */
  held: HeldNose = "no beat";

  /** Point of the midline before each sensor, and the sensor's share of the way to the next. */
  readonly #point: Uint16Array;
  readonly #share: Float64Array;
  readonly #delayS: number;
  readonly #fit: HarmonicFit;
  readonly #values: Float64Array;
  readonly #solver: NoseSolver;
  /** By sensor: share of late readings that could be used. */
  readonly #whole: Float64Array;
  /** Harmonics shown: by axis and harmonic, cosine and sine. */
  readonly #shownHarmonics = new Float64Array(6 * HARMONICS);
  /** Last known of the beat, rad/s; 0 before the first. */
  #omega = 0;
  /** Beats since the last fit, and fits since the last solution. */
  #sinceFit = 0;
  #fits = 0;
  /** How much of the motion is shown, 0..1. */
  #shown = 0;
  readonly #force = new Float64Array(3);

  constructor({ stations, lengthM, pointCount, delayS, levelTauS }: HeadMotionOptions) {
    const places = stations.map((station) => station * (pointCount - 1));
    this.#point = Uint16Array.from(places, (place) => Math.min(Math.floor(place), pointCount - 2));
    this.#share = Float64Array.from(places, (place, i) => place - this.#point[i]!);
    this.#delayS = delayS;
    this.#fit = new HarmonicFit({ channels: stations.length * Channel.COUNT, harmonics: HARMONICS });
    this.#values = new Float64Array(stations.length * Channel.COUNT);
    this.#solver = new NoseSolver({ stations, lengthM, levelTauS, delayS });
    this.#whole = new Float64Array(stations.length);
  }

  /**
   * Takes one sweep, and shifts the midline by the nose's displacement.
   * @param orientations body axes to earth, 4 a sensor
   * @param trust as in sweep.ts
   * @param axis east and north share of the travel axis's unit vector
   * @param positions 3 per point, m, earth axes, nose first and at the origin; changed in place
   */
  step(
    sweep: Sweep,
    orientations: Float64Array,
    trust: Uint8Array,
    beat: BeatNow,
    axis: Float64Array,
    positions: Float64Array,
  ): void {
    if (beat.frequencyHz !== null) this.#omega = TURN * beat.frequencyHz;
    if (this.#omega === 0) return;
    const cosine = axis[0]!;
    const sine = axis[1]!;
    const beats = Math.min((sweep.stepS * this.#omega) / TURN, LONGEST_STEP_BEATS);
    this.#sinceFit += beats;
    // Half a sweep early is nearer than half a sweep late.
    if (this.#sinceFit + 0.5 * beats >= 1 / FITS_A_BEAT) {
      this.#takeReadings(sweep, orientations, trust, positions, cosine, sine);
      this.#fit.step(beat.phase, 1 - Math.exp(-this.#sinceFit / FIT_BEATS), this.#values);
      this.#sinceFit = 0;
      if (this.#fits++ % FITS_A_SOLUTION === 0) this.#solver.solve(this.#fit, this.#whole, this.#omega);
    }
    this.held = this.#reasonToHold(beat);
    this.#show(beat.phase, beats);
    if (this.#shown > 0) this.#shift(positions, cosine, sine);
  }

  #reasonToHold(beat: BeatNow): HeldNose {
    if (beat.frequencyHz === null) return "no beat";
    if (this.#solver.sensors < 2) return "readings missing";
    return this.#solver.unconfirmed < UNCONFIRMED ? null : "sensors disagree";
  }

  /** Leaves what every sensor tells, travel axes, in #values; NaN where a reading cannot be used. */
  #takeReadings(
    sweep: Sweep,
    orientations: Float64Array,
    trust: Uint8Array,
    positions: Float64Array,
    cosine: number,
    sine: number,
  ): void {
    const values = this.#values;
    const force = this.#force;
    const newest = 1 - Math.exp(-this.#sinceFit / FIT_BEATS);
    for (let i = 0, at = 0; i < trust.length; i++, at += Channel.COUNT) {
      const usable =
        trust[i] !== TRUST.LOST &&
        (sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL &&
        (sweep.conditions[i]! & SPOILT) === 0;
      this.#whole[i]! += newest * ((usable ? 1 : 0) - this.#whole[i]!);
      if (!usable) {
        values.fill(Number.NaN, at, at + Channel.COUNT);
        continue;
      }
      this.#turnForce(sweep.values, CHANNELS * i, orientations, 4 * i);
      const point = 3 * this.#point[i]!;
      const share = this.#share[i]!;
      const east = positions[point]! + share * (positions[point + 3]! - positions[point]!);
      const north = positions[point + 1]! + share * (positions[point + 4]! - positions[point + 1]!);
      const tangentEast = positions[point]! - positions[point + 3]!;
      const tangentNorth = positions[point + 1]! - positions[point + 4]!;
      values[at + Channel.FORCE] = cosine * force[0]! + sine * force[1]!;
      values[at + Channel.FORCE + 1] = cosine * force[1]! - sine * force[0]!;
      values[at + Channel.FORCE + 2] = force[2]!;
      values[at + Channel.PLACE] = cosine * east + sine * north;
      values[at + Channel.PLACE + 1] = cosine * north - sine * east;
      values[at + Channel.PLACE + 2] =
        positions[point + 2]! + share * (positions[point + 5]! - positions[point + 2]!);
      values[at + Channel.ANGLE] =
        (cosine * tangentNorth - sine * tangentEast) /
        Math.sqrt(tangentEast * tangentEast + tangentNorth * tangentNorth + 1e-12);
    }
  }

  /** Leaves a specific force in earth axes in #force: carried to the time of the orientations, then turned. */
  #turnForce(values: Float64Array, at: number, orientations: Float64Array, orientationAt: number): void {
    const x = values[at + ACCEL]!;
    const y = values[at + ACCEL + 1]!;
    const z = values[at + ACCEL + 2]!;
    const tx = this.#delayS * values[at + GYRO]!;
    const ty = this.#delayS * values[at + GYRO + 1]!;
    const tz = this.#delayS * values[at + GYRO + 2]!;
    const force = this.#force;
    force[0] = x - (ty * z - tz * y);
    force[1] = y - (tz * x - tx * z);
    force[2] = z - (tx * y - ty * x);
    rotate(force, orientations, force, 0, orientationAt, 0);
  }

  /** Leaves what is shown of the nose's motion in `displacement`. */
  #show(phase: number, beats: number): void {
    const { displacement } = this;
    const shown = this.#shownHarmonics;
    const { harmonics } = this.#solver;
    const follow = Math.min(1, beats / SMOOTH_BEATS);
    this.#shown += Math.min(1, beats / BLEND_BEATS) * ((this.held === null ? 1 : 0) - this.#shown);
    if (this.held !== null && this.#shown < STILL) this.#shown = 0;
    const cosine = Math.cos(phase);
    const sine = Math.sin(phase);
    for (let axis = 0, at = 0; axis < 3; axis++) {
      // Each harmonic's is the one before it turned on by the phase.
      let c = this.#shown * cosine;
      let s = this.#shown * sine;
      let sum = 0;
      for (let k = 0; k < HARMONICS; k++, at += 2) {
        const ofCosine = shown[at]! + follow * (harmonics[at]! - shown[at]!);
        const ofSine = shown[at + 1]! + follow * (harmonics[at + 1]! - shown[at + 1]!);
        shown[at] = ofCosine;
        shown[at + 1] = ofSine;
        sum += ofCosine * c + ofSine * s;
        const turned = c * cosine - s * sine;
        s = s * cosine + c * sine;
        c = turned;
      }
      displacement[axis] = sum;
    }
  }

  #shift(positions: Float64Array, cosine: number, sine: number): void {
    const ahead = this.displacement[0]!;
    const left = this.displacement[1]!;
    const up = this.displacement[2]!;
    const east = cosine * ahead - sine * left;
    const north = sine * ahead + cosine * left;
    for (let at = 0; at < positions.length; at += 3) {
      positions[at]! += east;
      positions[at + 1]! += north;
      positions[at + 2]! += up;
    }
  }
}
