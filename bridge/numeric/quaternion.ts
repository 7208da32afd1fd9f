/**
 * Unit quaternions: Hamilton product, scalar first (w, x, y, z), read as the rotation that carries the coordinates of a
 * vector from the named frame to the next one outward (sensor to earth).
 *
 * Every function writes into the caller's `out` at `outAt` and allocates nothing. `out` may be one of the inputs, at the
 * same offset: all inputs are read before the first output is written.
 */

/** Anything with numbers in slots; the hot paths pass Float64Array only. */
export interface Slots {
  [index: number]: number;
  readonly length: number;
}

/**
 * Below this squared half angle (rad²) sine and cosine are taken from their series to x⁸ and x¹⁰: the first terms left
 * out are below 1e-17, less than the rounding of a double.
 */
const SERIES_BELOW = 0.01;

const IDENTITY = Float64Array.of(1, 0, 0, 0);

/** out = a b: first b, then a, as rotations of a vector. */
export function multiply(out: Slots, a: Slots, b: Slots, outAt = 0, aAt = 0, bAt = 0): void {
  const aw = a[aAt]!;
  const ax = a[aAt + 1]!;
  const ay = a[aAt + 2]!;
  const az = a[aAt + 3]!;
  const bw = b[bAt]!;
  const bx = b[bAt + 1]!;
  const by = b[bAt + 2]!;
  const bz = b[bAt + 3]!;
  out[outAt] = aw * bw - ax * bx - ay * by - az * bz;
  out[outAt + 1] = aw * bx + ax * bw + ay * bz - az * by;
  out[outAt + 2] = aw * by - ax * bz + ay * bw + az * bx;
  out[outAt + 3] = aw * bz + ax * by - ay * bx + az * bw;
}

/** out = the inverse rotation of the unit quaternion q. */
export function conjugate(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  out[outAt] = q[qAt]!;
  out[outAt + 1] = -q[qAt + 1]!;
  out[outAt + 2] = -q[qAt + 2]!;
  out[outAt + 3] = -q[qAt + 3]!;
}

/** out = q / |q|. A quaternion without direction (zero, or not finite) gives the identity. */
export function normalise(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  const w = q[qAt]!;
  const x = q[qAt + 1]!;
  const y = q[qAt + 2]!;
  const z = q[qAt + 3]!;
  const norm = Math.sqrt(w * w + x * x + y * y + z * z);
  if (!(norm > 0 && norm < Infinity)) {
    setIdentity(out, outAt);
    return;
  }
  const scale = 1 / norm;
  out[outAt] = scale * w;
  out[outAt + 1] = scale * x;
  out[outAt + 2] = scale * y;
  out[outAt + 3] = scale * z;
}

/** out = the identity rotation. */
export function setIdentity(out: Slots, outAt = 0): void {
  out[outAt] = 1;
  out[outAt + 1] = 0;
  out[outAt + 2] = 0;
  out[outAt + 3] = 0;
}

/** out (3 slots) = the vector v (3 slots) rotated by the unit quaternion q. */
export function rotate(out: Slots, q: Slots, v: Slots, outAt = 0, qAt = 0, vAt = 0): void {
  const w = q[qAt]!;
  const x = q[qAt + 1]!;
  const y = q[qAt + 2]!;
  const z = q[qAt + 3]!;
  const vx = v[vAt]!;
  const vy = v[vAt + 1]!;
  const vz = v[vAt + 2]!;
  // v + 2 w (u × v) + 2 u × (u × v) with u the vector part.
  const tx = 2 * (y * vz - z * vy);
  const ty = 2 * (z * vx - x * vz);
  const tz = 2 * (x * vy - y * vx);
  out[outAt] = vx + w * tx + y * tz - z * ty;
  out[outAt + 1] = vy + w * ty + z * tx - x * tz;
  out[outAt + 2] = vz + w * tz + x * ty - y * tx;
}

/** out (9 slots, by rows) = the rotation matrix of the unit quaternion q: out · v is v rotated by q. */
export function toMatrix(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  const w = q[qAt]!;
  const x = q[qAt + 1]!;
  const y = q[qAt + 2]!;
  const z = q[qAt + 3]!;
  out[outAt] = 1 - 2 * (y * y + z * z);
  out[outAt + 1] = 2 * (x * y - w * z);
  out[outAt + 2] = 2 * (x * z + w * y);
  out[outAt + 3] = 2 * (x * y + w * z);
  out[outAt + 4] = 1 - 2 * (x * x + z * z);
  out[outAt + 5] = 2 * (y * z - w * x);
  out[outAt + 6] = 2 * (x * z - w * y);
  out[outAt + 7] = 2 * (y * z + w * x);
  out[outAt + 8] = 1 - 2 * (x * x + y * y);
}

/**
 * out = q with its length brought back to one, for a quaternion already within rounding of it: one Newton step for
 * 1/|q|, which squares the error.
 */
export function keepUnit(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  const w = q[qAt]!;
  const x = q[qAt + 1]!;
  const y = q[qAt + 2]!;
  const z = q[qAt + 3]!;
  const scale = 1.5 - 0.5 * (w * w + x * x + y * y + z * z);
  out[outAt] = scale * w;
  out[outAt + 1] = scale * x;
  out[outAt + 2] = scale * y;
  out[outAt + 3] = scale * z;
}

/**
 * out = exp of a rotation vector (3 slots, rad): a turn by its length about its direction. Exact for any length; a small
 * one uses the series of sine and cosine, so nothing is divided by a length near zero.
 */
export function fromRotationVector(out: Slots, vector: Slots, outAt = 0, vectorAt = 0): void {
  turnBy(out, IDENTITY, vector, outAt, 0, vectorAt);
}

/**
 * out = q exp(vector): the unit quaternion q turned on by a rotation vector in its own inner frame (3 slots, rad), and kept
 * at unit length as keepUnit does. One pass, for the inner loop of strapdown integration.
 */
export function turnBy(out: Slots, q: Slots, vector: Slots, outAt = 0, qAt = 0, vectorAt = 0): void {
  const vx = vector[vectorAt]!;
  const vy = vector[vectorAt + 1]!;
  const vz = vector[vectorAt + 2]!;
  const s = 0.25 * (vx * vx + vy * vy + vz * vz); // half angle squared
  let bw: number; // cosine of the half angle
  let factor: number; // sine of the half angle / angle
  if (s < SERIES_BELOW) {
    bw = 1 - s * (1 / 2 - s * (1 / 24 - s * (1 / 720 - s * (1 / 40320 - s * (1 / 3628800)))));
    factor = 1 / 2 - s * (1 / 12 - s * (1 / 240 - s * (1 / 10080 - s * (1 / 725760))));
  } else {
    const half = Math.sqrt(s);
    bw = Math.cos(half);
    factor = Math.sin(half) / (2 * half);
  }
  const bx = factor * vx;
  const by = factor * vy;
  const bz = factor * vz;
  const aw = q[qAt]!;
  const ax = q[qAt + 1]!;
  const ay = q[qAt + 2]!;
  const az = q[qAt + 3]!;
  const scale = 1.5 - 0.5 * (aw * aw + ax * ax + ay * ay + az * az);
  out[outAt] = scale * (aw * bw - ax * bx - ay * by - az * bz);
  out[outAt + 1] = scale * (aw * bx + ax * bw + ay * bz - az * by);
  out[outAt + 2] = scale * (aw * by - ax * bz + ay * bw + az * bx);
  out[outAt + 3] = scale * (aw * bz + ax * by - ay * bx + az * bw);
}

/**
 * out (3 slots, rad) = log of the unit quaternion q: the rotation vector of the shorter way round, its length in
 * [0, π].
 */
export function toRotationVector(out: Slots, q: Slots, outAt = 0, qAt = 0): void {
  setRotationVector(out, outAt, q[qAt]!, q[qAt + 1]!, q[qAt + 2]!, q[qAt + 3]!);
}

/** out (3 slots, rad) = log(a^-1 b): the turn that leads from a to b, in their own inner frame, the shorter way round. */
export function turnBetween(
  out: Float64Array,
  a: Float64Array,
  b: Float64Array,
  outAt = 0,
  aAt = 0,
  bAt = 0,
): void {
  const aw = a[aAt]!;
  const ax = a[aAt + 1]!;
  const ay = a[aAt + 2]!;
  const az = a[aAt + 3]!;
  const bw = b[bAt]!;
  const bx = b[bAt + 1]!;
  const by = b[bAt + 2]!;
  const bz = b[bAt + 3]!;
  setRotationVector(
    out,
    outAt,
    aw * bw + ax * bx + ay * by + az * bz,
    aw * bx - ax * bw - ay * bz + az * by,
    aw * by + ax * bz - ay * bw - az * bx,
    aw * bz - ax * by + ay * bx - az * bw,
  );
}

function setRotationVector(out: Slots, outAt: number, w: number, x: number, y: number, z: number): void {
  const sine = Math.sqrt(x * x + y * y + z * z);
  const cosine = Math.abs(w);
  // angle / sin(half angle) tends to 2 / cos as the angle vanishes; the next term is below rounding here.
  const size = sine < 1e-9 ? 2 / cosine : (2 * Math.atan2(sine, cosine)) / sine;
  const factor = w < 0 ? -size : size;
  out[outAt] = factor * x;
  out[outAt + 1] = factor * y;
  out[outAt + 2] = factor * z;
}

/**
 * Angle between two unit quaternions on the 3-sphere, the shorter way round (half the angle of the rotation between
 * them), rad. From chord and co-chord: accurate near 0 as the arc cosine is not.
 */
export function arcBetween(a: Slots, b: Slots, aAt = 0, bAt = 0): number {
  const sign = signOfDot(a, b, aAt, bAt);
  let chord = 0;
  let coChord = 0;
  for (let i = 0; i < 4; i++) {
    const from = a[aAt + i]!;
    const to = sign * b[bAt + i]!;
    chord += (to - from) * (to - from);
    coChord += (to + from) * (to + from);
  }
  return 2 * Math.atan2(Math.sqrt(chord), Math.sqrt(coChord));
}

/**
 * out = spherical linear interpolation (Shoemake 1985, SIGGRAPH '85, "Animating rotation with quaternion curves") from
 * the unit quaternion a (share 0) to b (share 1), the shorter way round; of the two ways of a half turn, the one of b's
 * own sign. Shares outside 0..1 extrapolate at the same rate.
 */
export function slerp(out: Slots, a: Slots, b: Slots, share: number, outAt = 0, aAt = 0, bAt = 0): void {
  const arc = arcBetween(a, b, aAt, bAt);
  slerpKnown(out, a, b, share, arc, overSine(arc), signOfDot(a, b, aAt, bAt), outAt, aAt, bAt);
}

/** The same where arcBetween, overSine and signOfDot of the pair are known: for many shares between one pair. */
export function slerpKnown(
  out: Slots,
  a: Slots,
  b: Slots,
  share: number,
  arc: number,
  over: number,
  sign: number,
  outAt = 0,
  aAt = 0,
  bAt = 0,
): void {
  const fromA = over === 0 ? 1 - share : Math.sin((1 - share) * arc) * over;
  const fromB = sign * (over === 0 ? share : Math.sin(share * arc) * over);
  out[outAt] = fromA * a[aAt]! + fromB * b[bAt]!;
  out[outAt + 1] = fromA * a[aAt + 1]! + fromB * b[bAt + 1]!;
  out[outAt + 2] = fromA * a[aAt + 2]! + fromB * b[bAt + 2]!;
  out[outAt + 3] = fromA * a[aAt + 3]! + fromB * b[bAt + 3]!;
}

/** One over the sine of an arc; 0 where that is too small to divide by, and shares are taken as they are. */
export function overSine(arc: number): number {
  const sine = Math.sin(arc);
  return sine < 1e-9 ? 0 : 1 / sine;
}

/** -1 where b lies on the far half of the 3-sphere from a, else 1. */
export function signOfDot(a: Slots, b: Slots, aAt = 0, bAt = 0): number {
  const dot =
    a[aAt]! * b[bAt]! + a[aAt + 1]! * b[bAt + 1]! + a[aAt + 2]! * b[bAt + 2]! + a[aAt + 3]! * b[bAt + 3]!;
  return dot < 0 ? -1 : 1;
}
