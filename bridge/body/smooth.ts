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
import { turnBetween, turnBy } from "../numeric/quaternion.ts";
import type { Between } from "./between.ts";
import { NATURAL, Spline } from "./spline.ts";

/** Below this squared angle (rad²) the Jacobian's last factor is taken from its series: the first term left out is rounding. */
const SERIES_BELOW = 0.1;

/** Likewise for the sine of a squared angle. */
const SINE_SERIES_BELOW = 0.05;

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

  /**
   * What a wave adds: a turn about y and z at every odd place, rad, 2 each; zero without one. Whoever knows a wave writes
   * them.
   */
  readonly deflections: Float64Array;
  readonly #vector = new Float64Array(3);

  constructor(stations: readonly number[], placeCount: number) {
    this.#spline = new Spline({ stations, placeCount, endWeight: NATURAL });
    this.#left = new Uint16Array(stations.length);
    this.#turn = new Float64Array(3 * stations.length);
    this.#slope = new Float64Array(3 * stations.length);
    this.#nextSlope = new Float64Array(3 * stations.length);
    this.deflections = new Float64Array(placeCount - 1);
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
    for (let k = 0; k < gaps; k++)
      turnBetween(turn, orientations, orientations, 3 * k, 4 * left[k], 4 * left[k + 1]);
    this.#spline.slopes(turn, 3, this.#slope);
    for (let k = 0; k < gaps; k++) intoTangentSpace(this.#nextSlope, turn, this.#slope, 3 * k, 3 * k + 3);
  }

  axes(out: Float64Array): void {
    const { base, ofStep, ofSlope, ofNextSlope } = this.#spline;
    const { deflections } = this;
    const left = this.#left;
    const turns = this.#turn;
    const slopes = this.#slope;
    const nextSlopes = this.#nextSlope;
    const q = this.#orientations;
    for (let place = 1, to = 0; place <= deflections.length; place += 2, to += 3) {
      const k = base[place];
      const step = ofStep[place];
      const slope = ofSlope[place];
      const nextSlope = ofNextSlope[place];
      const x = step * turns[3 * k] + slope * slopes[3 * k] + nextSlope * nextSlopes[3 * k];
      const y = step * turns[3 * k + 1] + slope * slopes[3 * k + 1] + nextSlope * nextSlopes[3 * k + 1];
      const z = step * turns[3 * k + 2] + slope * slopes[3 * k + 2] + nextSlope * nextSlopes[3 * k + 2];
      // The x axis turned by the deflection ...
      const aboutY = deflections[place - 1];
      const aboutZ = deflections[place];
      const deflected = aboutY * aboutY + aboutZ * aboutZ;
      const sineShare = sineShareOf(deflected);
      const u = cosineOf(deflected, sineShare);
      const v = sineShare * aboutZ;
      const w = -sineShare * aboutY;
      // ... by the turn from the sensor before, v + 2 c (p x v) + 2 p x (p x v) of the half turn's cosine and vector ...
      const halfSquared = 0.25 * (x * x + y * y + z * z);
      const halfShare = sineShareOf(halfSquared);
      const c = cosineOf(halfSquared, halfShare);
      const half = 0.5 * halfShare;
      const px = half * x;
      const py = half * y;
      const pz = half * z;
      const tx = 2 * (py * w - pz * v);
      const ty = 2 * (pz * u - px * w);
      const tz = 2 * (px * v - py * u);
      const ahead = u + c * tx + py * tz - pz * ty;
      const aside = v + c * ty + pz * tx - px * tz;
      const up = w + c * tz + px * ty - py * tx;
      // ... and by that sensor's orientation.
      const at = 4 * left[k];
      const qw = q[at];
      const qx = q[at + 1];
      const qy = q[at + 2];
      const qz = q[at + 3];
      const rx = 2 * (qy * up - qz * aside);
      const ry = 2 * (qz * ahead - qx * up);
      const rz = 2 * (qx * aside - qy * ahead);
      out[to] = ahead + qw * rx + qy * rz - qz * ry;
      out[to + 1] = aside + qw * ry + qz * rx - qx * rz;
      out[to + 2] = up + qw * rz + qx * ry - qy * rx;
    }
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
  let f: number;
  if (squared < SERIES_BELOW) {
    const last = squared * (1 / 47900160 + squared * (691 / 1307674368000 + squared / 74724249600));
    f = 1 / 12 + squared * (1 / 720 + squared * (1 / 30240 + squared * (1 / 1209600 + last)));
  } else {
    const half = 0.5 * Math.sqrt(squared);
    f = (1 - half / Math.tan(half)) / squared;
  }
  out[turnAt] = sx + 0.5 * cx + f * (ty * cz - tz * cy);
  out[turnAt + 1] = sy + 0.5 * cy + f * (tz * cx - tx * cz);
  out[turnAt + 2] = sz + 0.5 * cz + f * (tx * cy - ty * cx);
}

/** Sine of the root of a number, over the root. */
function sineShareOf(squared: number): number {
  if (squared > SINE_SERIES_BELOW) return Math.sin(Math.sqrt(squared)) / Math.sqrt(squared);
  const last = squared * (1 / 362880 - squared / 39916800);
  return 1 - squared * (1 / 6 - squared * (1 / 120 - squared * (1 / 5040 - last)));
}

/** Cosine of that root, its sine's share being known. */
function cosineOf(squared: number, sineShare: number): number {
  if (squared > SINE_SERIES_BELOW) return Math.cos(Math.sqrt(squared));
  return Math.sqrt(1 - squared * sineShare * sineShare);
}
