/**
 * Hard and soft iron from readings all around: the ellipsoid that the readings lie on, and the symmetric matrix that makes a
 * sphere of it. First the quadric nearest in the algebraic sense (linear least squares; as in Merayo et al., Meas. Sci.
 * Technol. 11 (2000) 120, from memory), then least squares of the length itself, which noise does not pull to the
 * inside.
 *
 * A far centre with a vanishing matrix makes one length of any readings: the quadric is needed as the start, and steps that do
 * not help are not taken.
 *
 * A rotation after the matrix could not be seen; the symmetric one is taken, as in calibration.ts.
 */
import { inverse, solve, symmetricEigen, times } from "../numeric/matrix.ts";

export interface EllipsoidFit {
  /** Hard iron, µT. */
  readonly centre: Float64Array;
  /** Soft-iron matrix by rows, symmetric: times (reading - centre) it has the field's length. */
  readonly matrix: Float64Array;
  /** What lengths differ from the field by, RMS, µT. */
  readonly residual: number;
  /** Standard deviations: of the centre along its worst axis, µT, and of the matrix's worst element. */
  readonly sigmaCentre: number;
  readonly sigmaMatrix: number;
}

const STEPS = 100;
const UNKNOWNS = 9;
/** Row and column of the matrix's six elements. */
const ELEMENTS = [
  [0, 0],
  [1, 1],
  [2, 2],
  [0, 1],
  [0, 2],
  [1, 2],
] as const;

/**
 * @param readings x, y, z of each reading, one after the other, µT
 * @param length the field's; null takes the readings' own scale, so that the matrix has determinant 1
 * @returns null where the readings lie on no ellipsoid
 */
export function fitEllipsoid(readings: ArrayLike<number>, length: number | null): EllipsoidFit | null {
  const start = algebraic(readings);
  if (start === null) return null;
  const own = Math.cbrt(1 / determinant(start.shape));
  const field = length ?? own;
  const p = Float64Array.from([
    ...start.centre,
    ...ELEMENTS.map(([r, c]) => start.shape[3 * r + c]! * field),
  ]);
  const { normal, squares } = refine(readings, p, field);
  const covariance = inverse(normal, UNKNOWNS);
  if (covariance === null || !p.every(Number.isFinite)) return null;
  const count = readings.length / 3;
  const variance = squares / Math.max(1, count - UNKNOWNS);
  const worst = (from: number, to: number) => {
    const diagonal = Array.from({ length: to - from }, (_, k) => covariance[(from + k) * (UNKNOWNS + 1)]!);
    return Math.sqrt(variance * Math.max(...diagonal));
  };
  // Without a field given only the shape is known: the first fit's size is not quite the last one's.
  const matrix = matrixOf(p);
  const scale = length === null ? 1 / Math.cbrt(determinant(matrix)) : 1;
  return {
    centre: p.slice(0, 3),
    matrix: matrix.map((value) => value * scale),
    residual: Math.sqrt(squares / count),
    sigmaCentre: worst(0, 3),
    sigmaMatrix: worst(3, UNKNOWNS),
  };
}

/**
 * Brings `p` to the least squares of |matrix (reading - centre)| - field by the method of Levenberg and Marquardt: steps are
 * shortened until each one helps.
 */
function refine(readings: ArrayLike<number>, p: Float64Array, field: number) {
  let here = normalEquations(readings, p, field);
  let damping = 1e-3;
  for (let step = 0; step < STEPS && damping < 1e12; step++) {
    const damped = here.normal.map((value, k) => (k % (UNKNOWNS + 1) === 0 ? value * (1 + damping) : value));
    const by = solve(damped, here.pull, UNKNOWNS);
    const next = by === null ? p : p.map((value, k) => value + by[k]!);
    const there = normalEquations(readings, next, field);
    if (by === null || !(there.squares < here.squares)) {
      damping *= 10;
      continue;
    }
    const gained = here.squares - there.squares;
    p.set(next);
    here = there;
    damping /= 10;
    if (gained < 1e-15 * here.squares) break;
  }
  return here;
}

/** Normal equations of a step for |matrix (reading - centre)| = field, and the sum of squares now. */
function normalEquations(readings: ArrayLike<number>, p: Float64Array, field: number) {
  const normal = new Float64Array(UNKNOWNS * UNKNOWNS);
  const pull = new Float64Array(UNKNOWNS);
  const slope = new Float64Array(UNKNOWNS);
  const matrix = matrixOf(p);
  const off = new Float64Array(3);
  let squares = 0;
  for (let at = 0; at < readings.length; at += 3) {
    for (let k = 0; k < 3; k++) off[k] = readings[at + k]! - p[k]!;
    const u = times(matrix, off);
    const norm = Math.hypot(u[0]!, u[1]!, u[2]!);
    const miss = field - norm;
    squares += miss * miss;
    const towards = times(matrix, u);
    for (let k = 0; k < 3; k++) slope[k] = -towards[k]! / norm;
    ELEMENTS.forEach(([r, c], k) => {
      slope[3 + k] = (r === c ? u[r]! * off[r]! : u[r]! * off[c]! + u[c]! * off[r]!) / norm;
    });
    for (let r = 0; r < UNKNOWNS; r++) {
      pull[r]! += slope[r]! * miss;
      for (let c = 0; c < UNKNOWNS; c++) normal[r * UNKNOWNS + c]! += slope[r]! * slope[c]!;
    }
  }
  return { normal, pull, squares };
}

/** Centre and shape of the quadric nearest to the readings: |shape (reading - centre)| = 1, shape symmetric. */
function algebraic(readings: ArrayLike<number>): { centre: Float64Array; shape: Float64Array } | null {
  // About their mean and at a size of one, so that squares and products are of a size.
  const count = readings.length / 3;
  const mean = [0, 0, 0];
  for (let at = 0; at < readings.length; at++) mean[at % 3]! += readings[at]! / count;
  let square = 0;
  for (let at = 0; at < readings.length; at++) square += (readings[at]! - mean[at % 3]!) ** 2 / count;
  const size = Math.sqrt(square);
  const normal = new Float64Array(UNKNOWNS * UNKNOWNS);
  const right = new Float64Array(UNKNOWNS);
  for (let at = 0; at < readings.length; at += 3) {
    const [x, y, z] = [0, 1, 2].map((k) => (readings[at + k]! - mean[k]!) / size) as [number, number, number];
    const row = [x * x, y * y, z * z, 2 * x * y, 2 * x * z, 2 * y * z, 2 * x, 2 * y, 2 * z];
    for (let r = 0; r < UNKNOWNS; r++) {
      right[r]! += row[r]!;
      for (let c = 0; c < UNKNOWNS; c++) normal[r * UNKNOWNS + c]! += row[r]! * row[c]!;
    }
  }
  const q = solve(normal, right, UNKNOWNS);
  if (q === null) return null;
  const quadric = matrixOf(Float64Array.from([0, 0, 0, ...q.slice(0, 6)]));
  const centre = solve(quadric, [-q[6]!, -q[7]!, -q[8]!], 3);
  if (centre === null) return null;
  const constant = 1 + centre.reduce((sum, value, k) => sum + value * times(quadric, centre)[k]!, 0);
  const shape = root(quadric.map((value) => value / constant));
  if (shape === null) return null;
  return {
    centre: centre.map((value, k) => value * size + mean[k]!),
    shape: shape.map((value) => value / size),
  };
}

/** The symmetric square root of a positive definite 3 x 3 matrix, or null. */
function root(m: Float64Array): Float64Array | null {
  const { values, vectors } = symmetricEigen(m, 3);
  if (!(values[2]! > 0)) return null;
  return Float64Array.from({ length: 9 }, (_, at) =>
    vectors.reduce((sum, v, k) => sum + Math.sqrt(values[k]!) * v[Math.floor(at / 3)]! * v[at % 3]!, 0),
  );
}

/** The symmetric matrix whose six elements stand at 3 to 8. */
function matrixOf(p: Float64Array): Float64Array {
  return Float64Array.of(p[3]!, p[6]!, p[7]!, p[6]!, p[4]!, p[8]!, p[7]!, p[8]!, p[5]!);
}

function determinant(m: Float64Array): number {
  return (
    m[0]! * (m[4]! * m[8]! - m[5]! * m[7]!) -
    m[1]! * (m[3]! * m[8]! - m[5]! * m[6]!) +
    m[2]! * (m[3]! * m[7]! - m[4]! * m[6]!)
  );
}
