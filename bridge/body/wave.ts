/**
 * Orientation between the sensors of a body that beats: smooth (smooth.ts), and on top of it what a travelling wave does
 * between the sensors (wave-shape.ts), learned over the last beats (wave-fit.ts). Sensors' own orientations are met
 * exactly, and what is not periodic is interpolated smoothly.
 *
 * The wave counts as far as the motion is periodic and the wave can be followed from sensor to sensor. It fades in and
 * out, so that the midline never jumps; without it, this is `smooth`.
 */
import { turnBy } from "../numeric/quaternion.ts";
import type { WhySmooth } from "../wire/messages.ts";
import type { Between } from "./between.ts";
import { Smooth } from "./smooth.ts";
import { HARMONICS, WaveFit } from "./wave-fit.ts";
import { setPhasors, WaveShape } from "./wave-shape.ts";

/** The body's beat at a sweep. */
export interface Beating {
  /** rad, growing by 2π a beat without a jump. */
  readonly phase: number;
  /** Share of the body's motion that is periodic, 0..1. */
  readonly periodicShare: number;
}

/** Below this periodic share nothing is learned and the wave does not count; at the upper one it counts whole. */
const APERIODIC = 0.6;
const PERIODIC = 0.85;
/** Every sensor left must have been heard for so long, beats. */
const LEARNED_BEATS = 1.5;
/** From none to whole, s: some frames of a display, so that it is seen to glide. */
const FADE_S = 0.5;
/** Readings of the fit over which all places' waves are renewed: most of a beat, so that no sweep bears it all. */
const READINGS_TO_RENEW = 20;

export class Wave implements Between {
  readonly #smooth: Smooth;
  readonly #fit: WaveFit;
  readonly #shape: WaveShape;
  readonly #placesAReading: number;
  /** How much the wave counts, 0..1. */
  #weight = 0;
  #why: WhySmooth = "not beating";
  #learning = false;
  #learned = false;
  /** Newest that was learned from, rad. */
  #phase = 0;
  /** Cosine and negative sine of the phase and its multiples, times #weight. */
  readonly #phasors = new Float64Array(2 * HARMONICS);
  readonly #turn = new Float64Array(3);

  constructor(stations: readonly number[], placeCount: number) {
    this.#smooth = new Smooth(stations, placeCount);
    this.#fit = new WaveFit(stations.length);
    this.#shape = new WaveShape(stations, placeCount);
    this.#placesAReading = Math.ceil(placeCount / READINGS_TO_RENEW);
  }

  /** null while the wave counts for more than half. */
  get whySmooth(): WhySmooth | null {
    return this.#weight > 0.5 ? null : this.#why;
  }

  place(left: Uint16Array, count: number): void {
    this.#smooth.place(left, count);
    this.#shape.place(left, count);
    this.#shape.renew(this.#fit.amplitudes);
  }

  take(orientations: Float64Array): void {
    this.#smooth.take(orientations);
  }

  /**
   * Learns from the sweep that was taken, and sets how much the wave counts in it.
   * @param orientations 4 per sensor, body axes to earth
   * @param lost per sensor, 1 where it is
   * @param stepS time since the sweep before, s
   */
  beat(orientations: Float64Array, lost: Uint8Array, stepS: number, beating: Beating | null): void {
    const periodic = beating === null ? 0 : ramp(beating.periodicShare, APERIODIC, PERIODIC);
    if (beating !== null && periodic + this.#weight > 0) this.#learn(beating.phase, orientations, lost);
    else if (this.#learning) this.#forget();
    const learned = this.#hasLearned(lost);
    // What the places were given while little was known must not glide in.
    if (learned && !this.#learned) this.#shape.renew(this.#fit.amplitudes);
    this.#learned = learned;
    const counts = learned ? Math.min(periodic, this.#shape.followed) : 0;
    const most = stepS / FADE_S;
    this.#weight += Math.max(-most, Math.min(most, counts - this.#weight));
    this.#setPhasors();
    if (periodic < 0.5) this.#why = "not beating";
    else if (learned && this.#shape.followed < 0.5) this.#why = "sensors too far apart";
    else this.#why = "learning the wave";
  }

  axes(out: Float64Array): void {
    const { deflections } = this.#smooth;
    if (this.#weight === 0) deflections.fill(0);
    else this.#shape.oddPlaces(this.#phasors, deflections);
    this.#smooth.axes(out);
  }

  at(place: number, out: Float64Array): void {
    this.#smooth.at(place, out);
    if (this.#weight === 0) return;
    this.#shape.at(place, this.#phasors, this.#turn, 1);
    turnBy(out, out, this.#turn);
  }

  #learn(phase: number, orientations: Float64Array, lost: Uint8Array): void {
    this.#learning = true;
    this.#phase = phase;
    if (this.#fit.step(phase, orientations, lost))
      this.#shape.renewSome(this.#fit.amplitudes, this.#placesAReading);
  }

  #forget(): void {
    this.#learning = false;
    this.#fit.reset();
  }

  #hasLearned(lost: Uint8Array): boolean {
    const { heardBeats } = this.#fit;
    for (let i = 0; i < lost.length; i++) if (lost[i] === 0 && heardBeats[i] < LEARNED_BEATS) return false;
    return true;
  }

  #setPhasors(): void {
    if (this.#weight === 0) return;
    setPhasors(this.#phasors, this.#weight, -this.#phase);
  }
}

function ramp(value: number, from: number, to: number): number {
  return Math.max(0, Math.min(1, (value - from) / (to - from)));
}
