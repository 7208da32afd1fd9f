/**
 * What a recorded bend of the body says about each sensor: the axis it turned about, and, with the still straight pose
 * before, which way it faces about that axis.
 *
 * Axis. Bent in one plane, every piece of the body turns about its own z axis: the principal axis of the angular rate.
 *
 * Facing. Let each sensor's horizontal acceleration, in the frame it had in the straight pose, be a complex number b, known
 * but for a turn of its whole frame, e^(i psi). Between two neighbours lies a piece of the midline; with headings theta
 * since the straight pose its chord is known, and its second derivative d is the difference of their accelerations:
 *
 *     e^(i psi_behind) b_behind - e^(i psi_before) b_before = d
 *
 * The psi of all sensors follow by least squares. Neither the sign nor a fixed point of the body needs to be known. The
 * shape between two sensors is a guess (tangent angle even along the piece); its error lies across the body, along b, and
 * turns psi to second order only. The kinematics are those of fusion/gap-window.ts, there for small errors.
 */
import { identity, solve, symmetricEigen } from "../numeric/matrix.ts";
import { conjugate, multiply, rotate, setIdentity, turnBy } from "../numeric/quaternion.ts";
import { dot, type Vector } from "./attitude-fit.ts";

/** Recorded readings of all sensors in their own axes, the straight pose first. */
export interface BendRecord {
  readonly sensorCount: number;
  readonly count: number;
  readonly stepS: ArrayLike<number>;
  /** count x sensors x 6: angular rate less its mean at rest, rad/s; specific force, m/s². */
  readonly readings: ArrayLike<number>;
}

/**
 * Stretches the record is cut into: how they disagree tells how sure the whole is. Each fades into the next, since a cut
 * across a beat would disagree for its own reasons.
 */
export const STRETCHES = 8;
/** Of all motion, so much is ascribed to a sensor that hardly moves: it keeps the equations solvable where it is held. */
const STILL = 1e-9;
/** Gauss-Newton steps at most. */
const ROUNDS = 20;

export interface BendAxis {
  /** Unit length, sensor axes, either sense. */
  readonly axis: Float64Array;
  /** rad */
  readonly sigma: number;
  /** RMS rate about it, rad/s. */
  readonly rate: number;
}

/** The axis that sensor `i` turned about. */
export function bendAxis({ sensorCount, count, readings }: BendRecord, i: number): BendAxis {
  const parts = Array.from({ length: STRETCHES }, () => new Float64Array(9));
  for (let t = 0; t < count; t++) {
    const at = (t * sensorCount + i) * 6;
    eachStretch(t, count, (stretch, share) => {
      for (let k = 0; k < 9; k++) {
        parts[stretch]![k]! += share * readings[at + Math.floor(k / 3)]! * readings[at + (k % 3)]!;
      }
    });
  }
  const whole = total(parts, -1);
  const { values, vectors } = symmetricEigen(whole, 3);
  const axis = vectors[0]!;
  let spread = 0;
  for (let k = 0; k < STRETCHES; k++) {
    const without = symmetricEigen(total(parts, k), 3).vectors[0]!;
    spread += 1 - Math.min(1, dot(axis, without) ** 2);
  }
  return { axis, sigma: jackknife(spread), rate: Math.sqrt(values[0]! / count) };
}

export interface Facing {
  /** Turn about the body's z axis that a sensor's levelled frame still needs, rad. */
  readonly angle: number;
  /** Standard deviation by how the stretches disagree, rad. */
  readonly sigma: number;
  /** rad for 1 m/s² of sideways bias that is left in the accelerometer. */
  readonly perBias: number;
  /** RMS horizontal acceleration, m/s². */
  readonly moved: number;
}

export interface Levelled {
  /** Sensor axes to body axes but for a turn about z, scalar first. */
  readonly rotation: Float64Array;
  /** Mean specific force in the straight pose and the part of it that is bias, sensor axes, m/s². */
  readonly still: Vector;
  readonly bias: Vector;
}

/** Slots of a sensor's horizontal motion: acceleration, and the effect of a bias of 1 m/s² on it. */
interface Motion {
  readonly bx: Float64Array;
  readonly by: Float64Array;
  readonly theta: Float64Array;
}

/** Which way the sensors face. @param gapsM length of the piece behind each sensor but the last */
export function facings(
  record: BendRecord,
  levelled: readonly Levelled[],
  gapsM: readonly number[],
): Facing[] {
  const motions = levelled.map((level, i) => motionOf(record, i, level));
  const sums = gapsM.map((lengthM, g) => gapSums(record, motions[g]!, motions[g + 1]!, lengthM));
  const whole = solveFacings(sums.map((parts) => total(parts, -1)));
  const without = Array.from({ length: STRETCHES }, (_, k) =>
    solveFacings(sums.map((parts) => total(parts, k))),
  );
  return motions.map((motion, i) => {
    const angle = whole[i]!;
    const spread = without.reduce((sum, angles) => sum + wrap(angles[i]! - angle) ** 2, 0);
    let square = 0;
    let re = 0;
    let im = 0;
    for (let t = 0; t < record.count; t++) {
      const [x, y, c, s] = [
        motion.bx[t]!,
        motion.by[t]!,
        Math.cos(motion.theta[t]!) - 1,
        Math.sin(motion.theta[t]!),
      ];
      square += x * x + y * y;
      re += x * c + y * s;
      im += x * s - y * c;
    }
    return {
      angle,
      sigma: jackknife(spread),
      perBias: Math.hypot(re, im) / square,
      moved: Math.sqrt(square / record.count),
    };
  });
}

/** Heading and horizontal acceleration of sensor `i` since the straight pose, in its levelled frame. */
function motionOf({ sensorCount, count, stepS, readings }: BendRecord, i: number, level: Levelled): Motion {
  const motion = { bx: new Float64Array(count), by: new Float64Array(count), theta: new Float64Array(count) };
  const turn = new Float64Array(4);
  const body = new Float64Array(4);
  const back = new Float64Array(4);
  const half = new Float64Array(3);
  const force = new Float64Array(3);
  const rest = Float64Array.from([0, 1, 2], (k) => level.still[k]! - level.bias[k]!);
  conjugate(back, level.rotation);
  rotate(rest, level.rotation, rest);
  setIdentity(turn);
  for (let t = 0; t < count; t++) {
    const at = (t * sensorCount + i) * 6;
    const before = t === 0 ? at : at - sensorCount * 6;
    for (let k = 0; k < 3; k++) {
      half[k] = 0.5 * stepS[t]! * (readings[at + k]! + readings[before + k]!);
      force[k] = readings[at + 3 + k]! - level.bias[k]!;
    }
    if (t > 0) turnBy(turn, turn, half);
    rotate(force, turn, force);
    rotate(force, level.rotation, force);
    multiply(body, level.rotation, turn);
    multiply(body, body, back);
    motion.bx[t] = force[0]! - rest[0]!;
    motion.by[t] = force[1]! - rest[1]!;
    motion.theta[t] = 2 * Math.atan2(body[3]!, body[0]!);
  }
  return motion;
}

/** Sums over a gap: |behind|², |before|², behind conj(before), d conj(behind), d conj(before). */
const GAP = 8;

function gapSums(
  { count, stepS }: BendRecord,
  before: Motion,
  behind: Motion,
  lengthM: number,
): Float64Array[] {
  const parts = Array.from({ length: STRETCHES }, () => new Float64Array(GAP));
  const chord = (t: number) => {
    const bend = wrap(behind.theta[t]! - before.theta[t]!);
    const middle = before.theta[t]! + bend / 2;
    // The mean of e^(i theta) over an even bend, sin(bend/2) / (bend/2) to the fourth order.
    const shrink = -lengthM * (1 - (bend * bend) / 24 + bend ** 4 / 1920);
    return [shrink * Math.cos(middle), shrink * Math.sin(middle)] as const;
  };
  for (let t = 1; t + 1 < count; t++) {
    const [h0, h1] = [stepS[t]!, stepS[t + 1]!];
    // Across a loss the straight line through three readings says too little.
    if (Math.abs(h1 - h0) > 0.2 * Math.min(h0, h1)) continue;
    const [last, now, next] = [chord(t - 1), chord(t), chord(t + 1)];
    const second = (k: 0 | 1) => (2 * ((next[k] - now[k]) / h1 - (now[k] - last[k]) / h0)) / (h0 + h1);
    const [dx, dy] = [second(0), second(1)];
    const [x1, y1, x0, y0] = [behind.bx[t]!, behind.by[t]!, before.bx[t]!, before.by[t]!];
    const products = [
      x1 * x1 + y1 * y1,
      x0 * x0 + y0 * y0,
      x1 * x0 + y1 * y0,
      y1 * x0 - x1 * y0,
      dx * x1 + dy * y1,
      dy * x1 - dx * y1,
      dx * x0 + dy * y0,
      dy * x0 - dx * y0,
    ];
    eachStretch(t, count, (stretch, share) => {
      for (let k = 0; k < GAP; k++) parts[stretch]![k]! += share * products[k]!;
    });
  }
  return parts;
}

/**
 * The angles that fit all gaps best: first with each e^(i psi) any complex number, which is linear, then by Gauss-Newton
 * steps in the angles.
 */
function solveFacings(gaps: readonly Float64Array[]): Float64Array {
  const n = gaps.length + 1;
  const still = STILL * gaps.reduce((sum, gap) => sum + gap[0]! + gap[1]!, 0);
  const angles = linearStart(gaps, still);
  for (let round = 0; round < ROUNDS; round++) {
    const normal = identity(n).map((one) => one * still);
    const pull = new Float64Array(n);
    gaps.forEach((gap, g) => {
      const turn = angles[g + 1]! - angles[g]!;
      normal[g * n + g]! += gap[1]!;
      normal[(g + 1) * n + g + 1]! += gap[0]!;
      const both = Math.cos(turn) * gap[2]! - Math.sin(turn) * gap[3]!;
      normal[g * n + g + 1] = -both;
      normal[(g + 1) * n + g] = -both;
    });
    angles.forEach((angle, i) => {
      const [re, im] = target(gaps, angles, i);
      pull[i] = Math.cos(angle) * im - Math.sin(angle) * re;
    });
    const step = solve(normal, pull, n);
    if (step === null) break;
    for (let i = 0; i < n; i++) angles[i]! += step[i]!;
    if (step.every((value) => Math.abs(value) < 1e-10)) break;
  }
  return angles.map(wrap);
}

function linearStart(gaps: readonly Float64Array[], still: number): Float64Array {
  const n = gaps.length + 1;
  const size = 2 * n;
  const m = identity(size).map((one) => one * still);
  const right = new Float64Array(size);
  /** Adds the complex number re + i im at row i, column j. */
  const put = (i: number, j: number, re: number, im: number) => {
    m[2 * i * size + 2 * j]! += re;
    m[2 * i * size + 2 * j + 1]! -= im;
    m[(2 * i + 1) * size + 2 * j]! += im;
    m[(2 * i + 1) * size + 2 * j + 1]! += re;
  };
  gaps.forEach((gap, g) => {
    put(g + 1, g + 1, gap[0]!, 0);
    put(g + 1, g, -gap[2]!, gap[3]!);
    put(g, g, gap[1]!, 0);
    put(g, g + 1, -gap[2]!, -gap[3]!);
    right[2 * g + 2]! += gap[4]!;
    right[2 * g + 3]! += gap[5]!;
    right[2 * g]! -= gap[6]!;
    right[2 * g + 1]! -= gap[7]!;
  });
  const z = solve(m, right, size);
  return Float64Array.from({ length: n }, (_, i) => (z ? Math.atan2(z[2 * i + 1]!, z[2 * i]!) : 0));
}

/** What sensor `i`'s e^(i psi) should point along. */
function target(gaps: readonly Float64Array[], angles: Float64Array, i: number): [number, number] {
  let re = 0;
  let im = 0;
  const front = gaps[i - 1];
  if (front !== undefined) {
    // As the one behind: d conj(b) + conj(C) e^(i psi of the one before).
    const [c, s] = [Math.cos(angles[i - 1]!), Math.sin(angles[i - 1]!)];
    re += front[4]! + front[2]! * c + front[3]! * s;
    im += front[5]! + front[2]! * s - front[3]! * c;
  }
  const rear = gaps[i];
  if (rear !== undefined) {
    const [c, s] = [Math.cos(angles[i + 1]!), Math.sin(angles[i + 1]!)];
    re += rear[2]! * c - rear[3]! * s - rear[6]!;
    im += rear[2]! * s + rear[3]! * c - rear[7]!;
  }
  return [re, im];
}

/** Calls `add` with the stretches that reading `t` belongs to, and its share in each. */
function eachStretch(t: number, count: number, add: (stretch: number, share: number) => void): void {
  const place = Math.min(STRETCHES - 1, Math.max(0, ((t + 0.5) * STRETCHES) / count - 0.5));
  const stretch = Math.min(STRETCHES - 2, Math.floor(place));
  const later = Math.sin((Math.PI / 2) * (place - stretch)) ** 2;
  add(stretch, 1 - later);
  add(stretch + 1, later);
}

/** The sum of all parts but one. */
function total(parts: readonly Float64Array[], without: number): Float64Array {
  const sum = new Float64Array(parts[0]!.length);
  parts.forEach((part, k) => {
    if (k !== without)
      part.forEach((value, slot) => {
        sum[slot]! += value;
      });
  });
  return sum;
}

/** Standard deviation from the squared deviations of the results that each leave one stretch out (Quenouille, Tukey). */
function jackknife(squares: number): number {
  return Math.sqrt(((STRETCHES - 1) / STRETCHES) * squares);
}

function wrap(angle: number): number {
  return angle - 2 * Math.PI * Math.round(angle / (2 * Math.PI));
}
