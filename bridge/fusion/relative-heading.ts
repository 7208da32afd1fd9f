/**
 * Relative heading: what the body can and cannot do holds the headings of neighbouring sensors together, without any
 * magnetometer (gap-window.ts says how a gap is measured, gap-filter.ts how that becomes a correction).
 *
 * It sees the heading of each sensor against its neighbours while the body swims. It does not see the heading of the
 * chain as a whole, which rests on the mean of all gyroscopes and drifts with it; and while the body is still it sees
 * nothing: then each gap drifts by what is left of the gyroscopes' biases, and its sigma grows.
 *
 * All gaps are corrected together so that the mean heading of the chain does not turn.
 */
import { CONDITION, HAS_INERTIAL, type Sweep, TRUST } from "../sweep.ts";
import { advanceGap, Gap, gapSigma, measureGap, resetGap } from "./gap-filter.ts";
import { evaluate, type GapMeasurement, Sum } from "./gap-window.ts";
import { Slot } from "./record.ts";
import { Motion, takeMotion } from "./sensor-motion.ts";

export interface ChainBody {
  /** Of each sensor, 0 nose to 1 tail tip, ascending. */
  readonly stations: readonly number[];
  readonly lengthM: number;
  /** From tail tip to nose over whole tailbeats, rad, positive with the nose turned left; spread evenly along the body. */
  readonly meanBend: number;
}

/** A window ends with the first whole tailbeat after this long, s ... */
const WINDOW_S = 2;
/** ... or here, if there is no beat. */
const LONGEST_WINDOW_S = 5;
/** A gap is held while its standard deviation is below this, rad: 6°. */
const HELD = 0.105;
/** Slower than beats: taken off before anything is compared, s. Errors of inclination live there. */
const SLOW_S = 0.7;
/** What spoils a reading for this purpose. */
const SPOILT = CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;

export class RelativeHeading {
  /** Standard deviation of the heading between each sensor and the next, rad. */
  readonly sigma: Float64Array;
  /** To add to each sensor's heading after a step, rad. */
  readonly turns: Float64Array;
  readonly #motions: readonly Float64Array[];
  /** Whether each sensor's reading of this sweep can be used. */
  readonly #usable: Uint8Array;
  readonly #gaps: readonly Float64Array[];
  readonly #sums: readonly Float64Array[];
  /** Slow means of each gap: excitation, disagreement, and what biases add before and behind; then excitation as last seen. */
  readonly #slow: readonly Float64Array[];
  readonly #lengthsM: Float64Array;
  readonly #meanBends: Float64Array;
  readonly #measured: GapMeasurement = { error: 0, random: 0, lasting: 0 };

  constructor({ stations, lengthM, meanBend }: ChainBody) {
    const count = stations.length;
    const shares = Float64Array.from({ length: count - 1 }, (_, i) => stations[i + 1]! - stations[i]!);
    this.sigma = new Float64Array(count - 1);
    this.turns = new Float64Array(count);
    this.#motions = stations.map(() => new Float64Array(Motion.SIZE));
    this.#usable = new Uint8Array(count);
    this.#gaps = Array.from(shares, () => new Float64Array(Gap.SIZE));
    this.#sums = Array.from(shares, () => new Float64Array(Sum.SIZE));
    this.#slow = Array.from(shares, () => new Float64Array(5));
    this.#lengthsM = shares.map((share) => share * lengthM);
    this.#meanBends = shares.map((share) => -share * meanBend);
    this.reset();
  }

  /** Nothing is known of any gap. */
  reset(): void {
    for (const motion of this.#motions) motion.fill(0);
    for (let gap = 0; gap < this.#gaps.length; gap++) this.#reset(gap);
  }

  /**
   * One sweep, after all orientations are up to date.
   * @param records of the fusion
   * @param orientations body axes to earth, 4 a sensor
   */
  step(sweep: Sweep, records: readonly Float64Array[], orientations: Float64Array): void {
    for (let i = 0; i < records.length; i++) {
      const usable =
        records[i]![Slot.STARTED] === 1 &&
        (sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL &&
        (sweep.conditions[i]! & SPOILT) === 0;
      const taken = usable && takeMotion(this.#motions[i]!, records[i]!, orientations, sweep.values, i);
      this.#usable[i] = taken ? 1 : 0;
    }
    for (let gap = 0; gap < this.#gaps.length; gap++) {
      this.#gaps[gap]![Gap.STEP] = sweep.stepS;
      this.#follow(gap, records);
    }
    this.#shareTurns();
  }

  /** What the heading of a sensor is worth: good, settling or unaided, as the gaps on both sides are held. */
  trustOf(sensor: number): number {
    let trust: number = this.#gaps.length === 0 ? TRUST.HEADING_UNAIDED : TRUST.GOOD;
    for (let gap = Math.max(0, sensor - 1); gap <= sensor && gap < this.#gaps.length; gap++) {
      if (this.sigma[gap]! <= HELD) continue;
      const never = this.#gaps[gap]![Gap.MEASURED] === 0;
      trust = Math.max(trust, never ? TRUST.SETTLING : TRUST.HEADING_UNAIDED);
    }
    return trust;
  }

  #reset(gap: number): void {
    resetGap(this.#gaps[gap]!);
    this.#sums[gap]!.fill(0);
    this.#slow[gap]!.fill(0);
    this.sigma[gap] = gapSigma(this.#gaps[gap]!);
    this.turns[gap] = 0;
  }

  /** Leaves the gap's turn in `turns`. */
  #follow(gap: number, records: readonly Float64Array[]): void {
    const before = records[gap]!;
    const behind = records[gap + 1]!;
    if (before[Slot.STARTED] === 0 || behind[Slot.STARTED] === 0) {
      this.#reset(gap);
      return;
    }
    const g = this.#gaps[gap]!;
    const sums = this.#sums[gap]!;
    if (this.#usable[gap] === 1 && this.#usable[gap + 1] === 1) {
      this.#add(gap, g, sums);
    }
    const atRest = before[Slot.AT_REST] === 1 && behind[Slot.AT_REST] === 1;
    const clipped = before[Slot.CLIPPED] === 1 || behind[Slot.CLIPPED] === 1;
    advanceGap(g, atRest, clipped);
    this.turns[gap] = g[Gap.TURN]!;
    this.sigma[gap] = gapSigma(g);
  }

  /** Adds the newest readings to the gap's window, and closes it when it is due. */
  #add(gap: number, g: Float64Array, sums: Float64Array): void {
    const stepS = g[Gap.STEP]!;
    const i = this.#motions[gap]!;
    const j = this.#motions[gap + 1]!;
    const lengthM = this.#lengthsM[gap]!;
    const ix = i[Motion.TANGENT]!;
    const iy = i[Motion.TANGENT + 1]!;
    const jx = j[Motion.TANGENT]!;
    const jy = j[Motion.TANGENT + 1]!;
    const scale = 1 / Math.sqrt((ix + jx) * (ix + jx) + (iy + jy) * (iy + jy));
    const cx = scale * (ix + jx);
    const cy = scale * (iy + jy);
    const iddx = lengthM * i[Motion.TANGENT_RATE_OF_RATE]!;
    const iddy = lengthM * i[Motion.TANGENT_RATE_OF_RATE + 1]!;
    const jddx = lengthM * j[Motion.TANGENT_RATE_OF_RATE]!;
    const jddy = lengthM * j[Motion.TANGENT_RATE_OF_RATE + 1]!;
    const jax = j[Motion.ACCELERATION]!;
    const jay = j[Motion.ACCELERATION + 1]!;
    // The tangent runs from one end of the gap to the other in a straight line; it points to the nose, so r is against it.
    const px = jax - i[Motion.ACCELERATION]! + 0.5 * (iddx + jddx);
    const py = jay - i[Motion.ACCELERATION + 1]! + 0.5 * (iddy + jddy);
    let h = cy * (jax + iddx / 6 + jddx / 3) - cx * (jay + iddy / 6 + jddy / 3);
    let p = cx * px + cy * py;
    let before = cy * (ix - i[Motion.TANGENT_MEAN]!) - cx * (iy - i[Motion.TANGENT_MEAN + 1]!);
    let behind = cy * (jx - j[Motion.TANGENT_MEAN]!) - cx * (jy - j[Motion.TANGENT_MEAN + 1]!);
    const slow = this.#slow[gap]!;
    const share = Math.min(1, stepS / SLOW_S);
    h -= slow[0]! += share * (h - slow[0]!);
    p -= slow[1]! += share * (p - slow[1]!);
    before -= slow[2]! += share * (before - slow[2]!);
    behind -= slow[3]! += share * (behind - slow[3]!);
    sums[Sum.TIME]! += stepS;
    sums[Sum.EXPECTED]! += stepS * g[Gap.ERROR]!;
    sums[Sum.HH]! += stepS * h * h;
    sums[Sum.HP]! += stepS * h * p;
    sums[Sum.PP]! += stepS * p * p;
    sums[Sum.H_BEFORE]! += stepS * h * before;
    sums[Sum.H_BEHIND]! += stepS * h * behind;
    sums[Sum.COSINE]! += stepS * (ix * jx + iy * jy);
    sums[Sum.SINE]! += stepS * (ix * jy - iy * jx);
    const beat = h >= 0 && slow[4]! < 0;
    slow[4] = h;
    if (sums[Sum.TIME]! > LONGEST_WINDOW_S || (beat && sums[Sum.TIME]! > WINDOW_S)) this.#close(gap, beat);
  }

  #close(gap: number, beat: boolean): void {
    const sums = this.#sums[gap]!;
    const measured = this.#measured;
    const timeS = sums[Sum.TIME]!;
    if (evaluate(sums, beat, this.#meanBends[gap]!, measured)) {
      measureGap(this.#gaps[gap]!, measured, sums[Sum.EXPECTED]! / timeS, timeS);
    }
    sums.fill(0);
  }

  /** From the turn of each gap to that of each sensor: sums along the chain, less their mean. */
  #shareTurns(): void {
    const turns = this.turns;
    const last = turns.length - 1;
    let sum = 0;
    let mean = 0;
    for (let sensor = 0; sensor <= last; sensor++) {
      const gapTurn = sensor < last ? turns[sensor]! : 0;
      turns[sensor] = -sum;
      mean -= sum / (last + 1);
      sum += gapTurn;
    }
    for (let sensor = 0; sensor <= last; sensor++) turns[sensor]! -= mean;
  }
}
