/**
 * A rotation from directions seen in two frames: Wahba's problem (SIAM Review 7 (1965) 409), begun by Davenport's q-method
 * (as in Shuster & Oh, J. Guidance and Control 4 (1981) 70; from memory) and refined by Gauss-Newton steps, which also give
 * the covariance. A direction may be good for the turn about one axis only.
 */
import { inverse, symmetricEigen, times } from "../numeric/matrix.ts";
import { fromRotationVector, multiply, normalise, rotate } from "../numeric/quaternion.ts";

export type Vector = ArrayLike<number> & Iterable<number>;

export interface Sighting {
  /** Direction in sensor axes, any length. */
  readonly sensor: Vector;
  /** The same direction in body axes, unit length. */
  readonly body: Vector;
  /** Standard deviation, rad. */
  readonly sigma: number;
  /** Says something about the turn about this body axis only. */
  readonly about?: Vector;
}

export interface AttitudeFit {
  /** Sensor to body axes, scalar first. */
  readonly rotation: Float64Array;
  /** Of a small turn in body axes, rad², 3 x 3. */
  readonly covariance: Float64Array;
  /** Standard deviation of the turn that is known least, rad. */
  readonly sigma: number;
  /** Body axis of that turn. */
  readonly worst: Float64Array;
}

const STEPS = 8;
/** A turn of which nothing is known, rad. */
const UNKNOWN = Math.PI;

export function fitAttitude(sightings: readonly Sighting[]): AttitudeFit {
  const rotation = davenport(sightings);
  let covariance = new Float64Array(9);
  for (let step = 0; step < STEPS; step++) {
    const information = new Float64Array(9);
    const pull = new Float64Array(3);
    // What nothing is known of stays where it is.
    for (let k = 0; k < 9; k += 4) information[k] = 1 / UNKNOWN ** 2;
    for (const sighting of sightings) weigh(sighting, rotation, information, pull);
    covariance = Float64Array.from(inverse(information, 3)!);
    const turn = new Float64Array(4);
    fromRotationVector(turn, times(covariance, pull));
    multiply(rotation, turn, rotation);
    normalise(rotation, rotation);
  }
  const { values, vectors } = symmetricEigen(covariance, 3);
  return { rotation, covariance, sigma: Math.sqrt(values[0]!), worst: vectors[0]! };
}

/** Adds one sighting to the normal equations of a small turn in body axes. */
function weigh(sighting: Sighting, rotation: Float64Array, information: Float64Array, pull: Float64Array) {
  const { body, sigma, about } = sighting;
  const seen = turned(rotation, unit(sighting.sensor));
  const weight = 1 / sigma ** 2;
  // The turn that carries what is seen to where it should be.
  const off = cross(seen, body);
  for (let r = 0; r < 3; r++) {
    for (let c = 0; c < 3; c++) {
      const projector = about ? about[r]! * about[c]! : (r === c ? 1 : 0) - body[r]! * body[c]!;
      information[3 * r + c]! += weight * projector;
      pull[r]! += weight * projector * off[c]!;
    }
  }
}

/** The q-method: the eigenvector of the greatest eigenvalue. */
function davenport(sightings: readonly Sighting[]): Float64Array {
  const b = new Float64Array(9);
  for (const { sensor, body, sigma } of sightings) {
    const s = unit(sensor);
    for (let r = 0; r < 3; r++) for (let c = 0; c < 3; c++) b[3 * r + c]! += (body[r]! * s[c]!) / sigma ** 2;
  }
  const trace = b[0]! + b[4]! + b[8]!;
  const z = [b[7]! - b[5]!, b[2]! - b[6]!, b[3]! - b[1]!];
  const k = new Float64Array(16);
  k[0] = trace;
  for (let r = 0; r < 3; r++) {
    k[r + 1] = z[r]!;
    k[4 * (r + 1)] = z[r]!;
    for (let c = 0; c < 3; c++) {
      k[4 * (r + 1) + c + 1] = b[3 * r + c]! + b[3 * c + r]! - (r === c ? trace : 0);
    }
  }
  return symmetricEigen(k, 4).vectors[0]!;
}

export function turned(q: Float64Array, v: Vector): Float64Array {
  const out = new Float64Array(3);
  rotate(out, q, v);
  return out;
}

export function unit(v: Vector): Float64Array {
  const length = Math.hypot(v[0]!, v[1]!, v[2]!);
  return Float64Array.from([0, 1, 2], (k) => v[k]! / length);
}

export function cross(a: Vector, b: Vector): Float64Array {
  return Float64Array.of(
    a[1]! * b[2]! - a[2]! * b[1]!,
    a[2]! * b[0]! - a[0]! * b[2]!,
    a[0]! * b[1]! - a[1]! * b[0]!,
  );
}

export function dot(a: Vector, b: Vector): number {
  return a[0]! * b[0]! + a[1]! * b[1]! + a[2]! * b[2]!;
}
