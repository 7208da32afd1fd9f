/**
 * Orientation between the sensors on the sphere, once continuously differentiable along the body.
 *
 * How the body turns along itself (bend about y and z, twist about x, in its own axes there) is the slope of a natural
 * cubic spline (spline.ts) through the turns from sensor to sensor; it goes on evenly beyond the ends. Between two sensors the orientation is the first one's
 * times exp of a cubic in that one's tangent space (Hermite), which ends at the second sensor's orientation with the second
 * sensor's slope: for that the slope is carried into the first one's tangent space by the inverse right Jacobian of the
 * rotation group (Chirikjian, Stochastic Models, Information Theory, and Lie Groups 2, 2012, sec. 10.8; from memory). Turns
 * about one axis make it the plain cubic spline of the angle. Any bend and twist of less than half a turn between
 * neighbours will do, and of any number of turns along the body.
 */
import { conjugate, multiply, toRotationVector, turnBy } from "../numeric/quaternion.ts";
import type { Between } from "./between.ts";
import { NATURAL, Spline } from "./spline.ts";

/** Below this squared angle (rad²) the Jacobian's last factor is taken from its series to the fourth power: rounding. */
const SERIES_BELOW = 1e-3;

export class Smooth implements Between {
  readonly #spline: Spline;
  readonly #left: Uint16Array;
  #orientations: Float64Array = new Float64Array(0);

  // 3 numbers a sensor left, in its axes.
  /** Turn to the next sensor, rad. */
  readonly #turn: Float64Array;
  /** Turn per body length, rad. */
  readonly #slope: Float64Array;
  /** The next sensor's slope in this one's tangent space. */
  readonly #nextSlope: Float64Array;

  readonly #inverse = new Float64Array(4);
  readonly #vector = new Float64Array(3);

  constructor(stations: readonly number[], placeCount: number) {
    this.#spline = new Spline({ stations, placeCount, endWeight: NATURAL });
    this.#left = new Uint16Array(stations.length);
    this.#turn = new Float64Array(3 * stations.length);
    this.#slope = new Float64Array(3 * stations.length);
    this.#nextSlope = new Float64Array(3 * stations.length);
  }

  place(left: Uint16Array, count: number): void {
    this.#left.set(left);
    this.#spline.place(left, count);
  }

  take(orientations: Float64Array): void {
    this.#orientations = orientations;
    const left = this.#left;
    const turn = this.#turn;
    const gaps = this.#spline.count - 1;
    const between = this.#inverse;
    for (let k = 0; k < gaps; k++) {
      conjugate(between, orientations, 0, 4 * left[k]);
      multiply(between, between, orientations, 0, 0, 4 * left[k + 1]);
      toRotationVector(turn, between, 3 * k);
    }
    this.#spline.slopes(turn, 3, this.#slope);
    for (let k = 0; k < gaps; k++) intoTangentSpace(this.#nextSlope, turn, this.#slope, 3 * k, 3 * k + 3);
  }

  at(place: number, out: Float64Array): void {
    const { base, ofStep, ofSlope, ofNextSlope } = this.#spline;
    const k = base[place];
    const step = ofStep[place];
    const slope = ofSlope[place];
    const nextSlope = ofNextSlope[place];
    const vector = this.#vector;
    for (let axis = 0, i = 3 * k; axis < 3; axis++, i++)
      vector[axis] = step * this.#turn[i] + slope * this.#slope[i] + nextSlope * this.#nextSlope[i];
    turnBy(out, this.#orientations, vector, 0, 4 * this.#left[k]);
  }
}

/**
 * out = rate of change of the rotation vector `turn` under which exp(turn) turns on by `slope` in its inner frame: the
 * inverse right Jacobian, slope + turn x slope / 2 + f turn x (turn x slope), f = (1 - a cot a) / (4 a²), a half the angle.
 * @param turn at `turnAt`, written at the same offset of `out`
 */
function intoTangentSpace(
  out: Float64Array,
  turn: Float64Array,
  slope: Float64Array,
  turnAt: number,
  slopeAt: number,
): void {
  const tx = turn[turnAt];
  const ty = turn[turnAt + 1];
  const tz = turn[turnAt + 2];
  const sx = slope[slopeAt];
  const sy = slope[slopeAt + 1];
  const sz = slope[slopeAt + 2];
  const cx = ty * sz - tz * sy;
  const cy = tz * sx - tx * sz;
  const cz = tx * sy - ty * sx;
  const squared = tx * tx + ty * ty + tz * tz;
  const half = 0.5 * Math.sqrt(squared);
  const f =
    squared < SERIES_BELOW
      ? 1 / 12 + squared * (1 / 720 + squared / 30240)
      : (1 - half / Math.tan(half)) / squared;
  out[turnAt] = sx + 0.5 * cx + f * (ty * cz - tz * cy);
  out[turnAt + 1] = sy + 0.5 * cy + f * (tz * cx - tx * cz);
  out[turnAt + 2] = sz + 0.5 * cz + f * (tx * cy - ty * cx);
}
