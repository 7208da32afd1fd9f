/**
 * The biases of the accelerometers across the body, found while it swims.
 *
 * A heading error moves a gap's disagreement in step with the excitation, a bias moves it in step with the swing of the
 * tangent, and on a body that a wave runs along the two are out of step. So what a window's disagreement has left when its
 * angle has been taken off tells of the biases on both sides: one equation a gap, with the biases of two sensors in it. All
 * gaps together, and what a calibrated accelerometer is good for, are solved by least squares. Gaps join sensors to a tree,
 * so Gaussian elimination takes one pass from its ends to its root and one back. Ours, no source.
 */
import { ALIKE_S, type BiasShare, leakOf, residualOf, Window } from "./gap-window.ts";

/** What the windows of a gap have left: means of products, with the part of the excitation taken off. */
enum Left {
  TIME = 0,
  HH = TIME + 1,
  RESIDUAL = HH + 1,
  LEAK = RESIDUAL + 1,
  PI = LEAK + 1,
  PJ = PI + 1,
  II = PJ + 1,
  IJ = II + 1,
  JJ = IJ + 1,
  SIZE = JJ + 1,
}

/** Sideways bias of a calibrated accelerometer, m/s²: 10 mg, common practice, no source. */
const BIAS = 0.1;
/** A gap's windows are averaged over this long, s: a bias goes with the temperature. Ours, no source. */
const MEMORY_S = 60;
/** What the midline's model leaves out of step with the excitation, as a share of it. Ours: rehearsals stay within it. */
const MODEL = 0.01;

export class SidewaysBias {
  /** By sensor: bias, m/s², positive to the left; its variance, and its covariance with the sensor ahead. */
  readonly biases: Float64Array;
  readonly #variances: Float64Array;
  readonly #covariances: Float64Array;
  /** By sensor: what the gap ahead of it has left. */
  readonly #left: readonly Float64Array[];
  /** Normal equations, by sensor: diagonal, coupling with the sensor ahead, right side. */
  readonly #diagonal: Float64Array;
  readonly #coupling: Float64Array;
  readonly #right: Float64Array;

  constructor(sensorCount: number) {
    const slots = () => new Float64Array(sensorCount);
    this.biases = slots();
    this.#variances = slots().fill(BIAS * BIAS);
    this.#covariances = slots();
    this.#left = Array.from(this.biases, () => new Float64Array(Left.SIZE));
    this.#diagonal = slots();
    this.#coupling = slots();
    this.#right = slots();
  }

  /** The gap ahead of a sensor is another one from now on. */
  forget(sensor: number): void {
    this.#left[sensor]!.fill(0);
  }

  /** Takes a window of the gap ahead of a sensor, and finds all biases anew. @param ahead by sensor: which; or -1 */
  observe(s: Float64Array, sensor: number, ahead: Int32Array): void {
    const left = this.#left[sensor]!;
    const timeS = s[Window.TIME]!;
    const toI = s[Window.HI]! / s[Window.HH]!;
    const toJ = s[Window.HJ]! / s[Window.HH]!;
    left[Left.TIME] = Math.min(MEMORY_S, left[Left.TIME]! + timeS);
    follow(left, Left.HH, timeS, s[Window.HH]!);
    follow(left, Left.RESIDUAL, timeS, timeS * residualOf(s));
    follow(left, Left.LEAK, timeS, timeS * leakOf(s));
    follow(left, Left.PI, timeS, s[Window.PI]! - toI * s[Window.HP]!);
    follow(left, Left.PJ, timeS, s[Window.PJ]! - toJ * s[Window.HP]!);
    follow(left, Left.II, timeS, s[Window.II]! - toI * s[Window.HI]!);
    follow(left, Left.IJ, timeS, s[Window.IJ]! - toI * s[Window.HJ]!);
    follow(left, Left.JJ, timeS, s[Window.JJ]! - toJ * s[Window.HJ]!);
    this.#solve(ahead);
  }

  /** What the biases of sensors i and j, on both sides of a window's gap, make of its angle. */
  shareOf(s: Float64Array, i: number, j: number, out: BiasShare): void {
    const toI = s[Window.HI]! / s[Window.HH]!;
    const toJ = s[Window.HJ]! / s[Window.HH]!;
    out.angle = toJ * this.biases[j]! - toI * this.biases[i]!;
    out.variance =
      toJ * toJ * this.#variances[j]! +
      toI * toI * this.#variances[i]! -
      2 * toI * toJ * this.#covariances[j]!;
  }

  #solve(ahead: Int32Array): void {
    this.#diagonal.fill(1 / (BIAS * BIAS));
    this.#right.fill(0);
    for (let j = 1; j < ahead.length; j++) this.#addGap(ahead[j]!, j);
    // Sensors further behind come later: from the ends to the root, a sensor's row takes in all that hang on it.
    for (let j = ahead.length - 1; j > 0; j--) {
      const i = ahead[j]!;
      if (i < 0) continue;
      const factor = this.#coupling[j]! / this.#diagonal[j]!;
      this.#diagonal[i]! -= factor * this.#coupling[j]!;
      this.#right[i]! -= factor * this.#right[j]!;
    }
    for (let j = 0; j < ahead.length; j++) {
      const i = ahead[j]!;
      const own = 1 / this.#diagonal[j]!;
      // Given the bias ahead, that of this sensor is a line, with a variance of its own.
      const slope = i < 0 ? 0 : -this.#coupling[j]! * own;
      this.biases[j] = own * this.#right[j]! + (i < 0 ? 0 : slope * this.biases[i]!);
      this.#covariances[j] = i < 0 ? 0 : slope * this.#variances[i]!;
      this.#variances[j] = own + slope * this.#covariances[j]!;
    }
  }

  #addGap(i: number, j: number): void {
    const left = this.#left[j]!;
    this.#coupling[j] = 0;
    if (i < 0 || left[Left.TIME] === 0) return;
    const model = MODEL * MODEL * left[Left.HH]! + left[Left.LEAK]!;
    const worth = 1 / (model + (left[Left.RESIDUAL]! * ALIKE_S) / left[Left.TIME]!);
    this.#diagonal[i]! += worth * left[Left.II]!;
    this.#diagonal[j]! += worth * left[Left.JJ]!;
    this.#coupling[j] = -worth * left[Left.IJ]!;
    this.#right[i]! -= worth * left[Left.PI]!;
    this.#right[j]! += worth * left[Left.PJ]!;
  }
}

/** The mean at a place follows a window's sum. */
function follow(left: Float64Array, at: number, timeS: number, sum: number): void {
  left[at]! += (timeS / left[Left.TIME]!) * (sum / timeS - left[at]!);
}
