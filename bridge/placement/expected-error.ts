/**
 * How far a midline will be off that is rebuilt from sensors at given places.
 *
 * Shape: over one cycle of the wave (after some to learn from, where the rebuilding learns), sensors with exact orientations at their stations give a midline through the
 * project's own rebuilding; its points are set against the same points of the true body, both from the nose. This is what
 * the guess between and beyond the sensors costs.
 *
 * Noise: each sensor's orientation errs by itself, about the vertical (heading) and about its own left axis (inclination;
 * roll leaves the midline's direction alone). Propagated by linearised variance: on the moving body each sensor is turned
 * a little about each axis, the points' displacements per radian are squared, weighted by the variances and summed.
 *
 * Both independent: total² = shape² + noise². All as shares of body length.
 */
import type { Gait } from "../numeric/gaits.ts";
import { fromRotationVector, multiply } from "../numeric/quaternion.ts";
import { SwimmingBody } from "./swimming-body.ts";

/** What rebuilds a midline of unit length from orientations: body/midline.ts, as the rig has it. */
export interface Rebuilding {
  /** 3 per point, nose at the origin. */
  readonly positions: Float64Array;
  /** @param phase of the beat, rad, for what is learned from the beats; left out where nothing is to be learned */
  step(orientations: Float64Array, trust: Uint8Array, phase?: number): void;
}

/** Standard deviation of a sensor's orientation, rad. */
export interface OrientationNoise {
  readonly inclination: number;
  readonly heading: number;
}

export interface ErrorModelOptions {
  readonly gait: Gait;
  readonly noise: OrientationNoise;
  /** Evenly spaced points of the midline, nose and tail tip included. */
  readonly pointCount: number;
  readonly rebuilding: (stations: readonly number[]) => Rebuilding;
  /** Moments of the cycle for the shape, evenly spaced. */
  readonly moments: number;
  /** How many of them also serve for the noise. */
  readonly noiseMoments: number;
  /** Beats that the rebuilding learns from before it counts; 0: it is told no phase and learns nothing. */
  readonly learnedBeats: number;
}

export interface ExpectedError {
  /** RMS over all points and the cycle. */
  readonly shape: number;
  readonly noise: number;
  readonly total: number;
  /** The same for each point. */
  readonly local: {
    readonly shape: Float64Array;
    readonly noise: Float64Array;
    readonly total: Float64Array;
  };
  /** Half the tail's peak-to-peak excursion against the nose: of the true body and of the rebuilt one, exact sensors. */
  readonly tailAmplitude: { readonly true: number; readonly rebuilt: number };
}

/** By so much each sensor is turned for its effect, rad: small enough that the effect is linear to 0.1 %. */
const SMALL_TURN = 1e-3;

interface Moment {
  readonly body: SwimmingBody;
  /** The true points, 2 each: forward and left of the nose. */
  readonly points: Float64Array;
}

export class ErrorModel {
  readonly #options: ErrorModelOptions;
  readonly #moments: readonly Moment[];
  readonly #turned = new Float64Array(4);

  constructor(options: ErrorModelOptions) {
    this.#options = options;
    const { gait, moments, pointCount } = options;
    this.#moments = Array.from({ length: moments }, (_, i) => {
      const body = new SwimmingBody(gait, (2 * Math.PI * i) / moments);
      const points = Float64Array.from({ length: 2 * pointCount }, (_, at) => {
        const { x, y } = body.position((at >> 1) / (pointCount - 1));
        return at % 2 === 0 ? x : y;
      });
      return { body, points };
    });
  }

  /** @param stations ascending, 0 nose to 1 tail tip */
  expect(stations: readonly number[]): ExpectedError {
    const { pointCount, rebuilding, noiseMoments, moments, learnedBeats } = this.#options;
    const shape = new Float64Array(pointCount);
    const noise = new Float64Array(pointCount);
    const rebuilt = rebuilding(stations);
    const trust = new Uint8Array(stations.length);
    const orientations = new Float64Array(4 * stations.length);
    const tail = { true: new Extent(), rebuilt: new Extent() };
    const counted = learnedBeats * moments;
    for (let at = 0; at < counted + moments; at++) {
      const moment = at % moments;
      const { body, points } = this.#moments[moment];
      stations.forEach((station, i) => {
        const half = body.angle(station) / 2;
        orientations.set([Math.cos(half), 0, 0, Math.sin(half)], 4 * i);
      });
      const phase = learnedBeats > 0 ? (2 * Math.PI * at) / moments : undefined;
      rebuilt.step(orientations, trust, phase);
      if (at < counted) continue;
      addSquares(shape, rebuilt.positions, points, 1 / moments);
      tail.true.add(points[2 * pointCount - 1]);
      tail.rebuilt.add(rebuilt.positions[3 * pointCount - 2]);
      if (moment % (moments / noiseMoments) === 0) this.#addNoise(noise, rebuilt, orientations, trust, phase);
    }
    const total = shape.map((square, point) => square + noise[point]);
    return {
      shape: rms(shape),
      noise: rms(noise),
      total: rms(total),
      local: { shape: shape.map(Math.sqrt), noise: noise.map(Math.sqrt), total: total.map(Math.sqrt) },
      tailAmplitude: { true: tail.true.half, rebuilt: tail.rebuilt.half },
    };
  }

  /** Adds each sensor's share to the points' variances at one moment. */
  #addNoise(
    into: Float64Array,
    rebuilt: Rebuilding,
    orientations: Float64Array,
    trust: Uint8Array,
    phase: number | undefined,
  ): void {
    const { noise, noiseMoments } = this.#options;
    const still = rebuilt.positions.slice();
    const displaced = orientations.slice();
    const turned = this.#turned;
    const addTurned = (sensor: number, sigma: number) => {
      if (sigma === 0) return;
      displaced.set(turned, 4 * sensor);
      rebuilt.step(displaced, trust, phase);
      displaced.set(orientations.subarray(4 * sensor, 4 * sensor + 4), 4 * sensor);
      const weight = (sigma / SMALL_TURN) ** 2 / noiseMoments;
      for (let at = 0; at < still.length; at++) {
        into[Math.floor(at / 3)] += weight * (rebuilt.positions[at] - still[at]) ** 2;
      }
    };
    for (let sensor = 0; 4 * sensor < orientations.length; sensor++) {
      multiply(turned, ABOUT_VERTICAL, orientations, 0, 0, 4 * sensor);
      addTurned(sensor, noise.heading);
      multiply(turned, orientations, ABOUT_LEFT, 0, 4 * sensor, 0);
      addTurned(sensor, noise.inclination);
    }
  }
}

const ABOUT_VERTICAL = turnAbout([0, 0, SMALL_TURN]);
const ABOUT_LEFT = turnAbout([0, SMALL_TURN, 0]);

function turnAbout(vector: readonly number[]): Float64Array {
  const turn = new Float64Array(4);
  fromRotationVector(turn, vector);
  return turn;
}

/** Adds the squared distances between rebuilt (3 each) and true (2 each, level) points. */
function addSquares(into: Float64Array, rebuilt: Float64Array, points: Float64Array, weight: number): void {
  for (let point = 0; point < into.length; point++) {
    const forward = rebuilt[3 * point] - points[2 * point];
    const left = rebuilt[3 * point + 1] - points[2 * point + 1];
    const up = rebuilt[3 * point + 2];
    into[point] += weight * (forward * forward + left * left + up * up);
  }
}

function rms(squares: Float64Array): number {
  return Math.sqrt(squares.reduce((sum, square) => sum + square, 0) / squares.length);
}

class Extent {
  #least = Infinity;
  #greatest = -Infinity;

  add(value: number): void {
    this.#least = Math.min(this.#least, value);
    this.#greatest = Math.max(this.#greatest, value);
  }

  get half(): number {
    return (this.#greatest - this.#least) / 2;
  }
}
