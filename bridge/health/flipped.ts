/**
 * A sensor turned by half against its neighbours, so that its mounting in the rig file is not how it sits. Two witnesses:
 *
 * - gravity: over some seconds "up" at one sensor looks where "down" is at the others (turned over about its x or y);
 * - sideways motion: along a bending body the accelerations of two neighbours differ by what the piece between them does,
 *   which their rates of turn tell. A sensor that faces the tail (turned about z) feels it the wrong way round: changing
 *   its sign makes the disagreement on both its sides vanish. Two neighbours that both face the tail agree with each other
 *   and are not told.
 */
import { DEG_PER_RAD } from "../numeric/units.ts";
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_INERTIAL, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const KIND = "sensor flipped";
/** A few beats. */
const WINDOW_S = 4;
/** Two windows running say the same. */
const ONSET_S = WINDOW_S / 2;
const QUIET_S = WINDOW_S / 2;
/** Fewest sensors of which one can be told to be the odd one. */
const LEAST_SENSORS = 3;
/** Time constant of the mean that is taken off accelerations, s. */
const MEAN_S = 1;
/** Sideways acceleration below this tells nothing, m/s² RMS: ten times an accelerometer's noise (common practice). */
const MOVED = 0.1;
/** Changing the sign must leave less than this share of the disagreement; keeping it, more than its inverse. Ours: rehearsals. */
const DECISIVE = 0.4;
const BROKEN = CONDITION.STUCK | CONDITION.READ_FAILED | CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED;

/** Sums over a gap: squares behind and before, their product, the piece's share with each, and its square. */
const Sum = { BEHIND: 0, BEFORE: 1, BOTH: 2, PIECE_BEHIND: 3, PIECE_BEFORE: 4, PIECE: 5, SIZE: 6 } as const;

/** What a window says of a sensor. */
type Verdict = "unclear" | "as its neighbours" | "upside down" | "facing the tail";

export class FlippedSensors {
  readonly #setup: HealthSetup;
  readonly #state: Hysteresis;
  /** Sums of specific force, sensors x 3, and how many. */
  readonly #force: Float64Array;
  readonly #count: Float64Array;
  /** Mean sideways acceleration; acceleration now and one sweep ago, less it. */
  readonly #mean: Float64Array;
  readonly #side: Float64Array;
  readonly #sideBefore: Float64Array;
  /** Rate of turn one and two sweeps ago. */
  readonly #rate: Float64Array;
  readonly #rateBefore: Float64Array;
  readonly #angular: Float64Array;
  /** Good sweeps running, by sensor. */
  readonly #run: Uint32Array;
  readonly #gaps: Float64Array;
  readonly #gapCount: Float64Array;
  /** 1, or -1 for a sensor that faces the tail, as the window at hand is best explained. */
  readonly #facings: Int8Array;
  readonly #detail: Verdict[];
  #windowEndS = Number.NaN;
  #stepS = 0;

  constructor(setup: HealthSetup) {
    const n = setup.sensors.length;
    this.#setup = setup;
    this.#state = new Hysteresis(n, ONSET_S, QUIET_S);
    this.#force = new Float64Array(3 * n);
    this.#count = new Float64Array(n);
    this.#mean = new Float64Array(n);
    this.#side = new Float64Array(n);
    this.#sideBefore = new Float64Array(n);
    this.#rate = new Float64Array(n);
    this.#rateBefore = new Float64Array(n);
    this.#angular = new Float64Array(n);
    this.#run = new Uint32Array(n);
    this.#gaps = new Float64Array(Math.max(0, n - 1) * Sum.SIZE);
    this.#gapCount = new Float64Array(Math.max(0, n - 1));
    this.#facings = new Int8Array(n);
    this.#detail = new Array<Verdict>(n).fill("unclear");
  }

  /**
   * Needs this sweep's broken readings marked.
   * @param outOfOrder two sensors look swapped: motion then tells nothing of facing
   */
  observe(sweep: Sweep, outOfOrder: boolean): void {
    const { timeS } = sweep;
    if (this.#run.length < LEAST_SENSORS) return;
    if (!(timeS < this.#windowEndS)) {
      if (timeS - this.#windowEndS < WINDOW_S) this.#judge(timeS, outOfOrder);
      for (const sums of [this.#force, this.#count, this.#gaps, this.#gapCount]) sums.fill(0);
      this.#windowEndS = timeS + WINDOW_S;
    }
    for (let i = 0; i < sweep.sensorCount; i++) this.#follow(sweep, i);
    this.#stepS = sweep.stepS;
    for (let g = 0; g + 1 < sweep.sensorCount; g++) {
      if (this.#run[g]! >= 3 && this.#run[g + 1]! >= 3) this.#addGap(g);
    }
  }

  #follow({ values, present, conditions, stepS, lostBefore }: Sweep, i: number): void {
    const whole = (present[i]! & HAS_INERTIAL) === HAS_INERTIAL;
    if (!whole || (conditions[i]! & BROKEN) !== 0) {
      this.#run[i] = 0;
      return;
    }
    const at = i * CHANNELS;
    for (let k = 0; k < 3; k++) this.#force[3 * i + k]! += values[at + ACCEL + k]!;
    this.#count[i]!++;
    this.#run[i] = lostBefore > 0 ? 1 : this.#run[i]! + 1;
    const side = values[at + ACCEL + 1]!;
    if (this.#run[i] === 1) this.#mean[i] = side;
    const spin = values[at + GYRO + 2]!;
    // The angular acceleration belongs to the sweep before, so the acceleration of that one goes with it.
    this.#angular[i] = (spin - this.#rateBefore[i]!) / (stepS + this.#stepS);
    this.#rateBefore[i] = this.#rate[i]!;
    this.#rate[i] = spin;
    this.#sideBefore[i] = this.#side[i]!;
    this.#side[i] = side - this.#mean[i]!;
    this.#mean[i]! += Math.min(1, stepS / MEAN_S) * (side - this.#mean[i]!);
  }

  #addGap(g: number): void {
    const { sensors, lengthM } = this.#setup;
    const piece = (sensors[g + 1]!.station - sensors[g]!.station) * lengthM;
    const d = (-piece * (this.#angular[g]! + this.#angular[g + 1]!)) / 2;
    const before = this.#sideBefore[g]!;
    const behind = this.#sideBefore[g + 1]!;
    const at = g * Sum.SIZE;
    this.#gaps[at + Sum.BEHIND]! += behind * behind;
    this.#gaps[at + Sum.BEFORE]! += before * before;
    this.#gaps[at + Sum.BOTH]! += behind * before;
    this.#gaps[at + Sum.PIECE_BEHIND]! += d * behind;
    this.#gaps[at + Sum.PIECE_BEFORE]! += d * before;
    this.#gaps[at + Sum.PIECE]! += d * d;
    this.#gapCount[g]!++;
  }

  #judge(timeS: number, outOfOrder: boolean): void {
    this.#facings.fill(1);
    if (!outOfOrder) while (this.#turnWorst());
    for (let i = 0; i < this.#run.length; i++) {
      const byGravity = this.#byGravity(i);
      const verdict = byGravity === "upside down" || outOfOrder ? byGravity : this.#byMotion(i);
      // At rest gravity clears what gravity raised; facing the tail shows in motion alone.
      const cleared = verdict === "as its neighbours" || this.#detail[i] === "upside down";
      const bad = verdict === "upside down" || verdict === "facing the tail";
      if (bad) this.#detail[i] = verdict;
      else if (!cleared || byGravity === "unclear" || outOfOrder) continue;
      const turn = this.#state.step(i, timeS, bad);
      if (turn === Turn.REPORT && bad) {
        this.#setup.book.raise(KIND, i, "alarm", this.#state.sinceS[i]!, `${verdict} against its neighbours`);
      } else if (turn === Turn.END) this.#setup.book.clear(KIND, i, this.#state.lastBadS[i]!);
    }
  }

  /** Mean force at sensor `i` against that at all others. */
  #byGravity(i: number): Verdict {
    let along = 0;
    let own = 0;
    let others = 0;
    for (let k = 0; k < 3; k++) {
      let sum = 0;
      for (let j = 0; j < this.#count.length; j++) {
        if (j !== i && this.#count[j]! > 0) sum += this.#force[3 * j + k]! / this.#count[j]!;
      }
      const force = this.#force[3 * i + k]! / this.#count[i]!;
      along += force * sum;
      own += force * force;
      others += sum * sum;
    }
    const off = Math.acos(along / Math.sqrt(own * others)) * DEG_PER_RAD;
    if (Number.isNaN(off)) return "unclear";
    return off > this.#setup.thresholds.flippedDeg ? "upside down" : "as its neighbours";
  }

  /** Turns the sensor round whose turning settles most; false when there is none. */
  #turnWorst(): boolean {
    let worst = -1;
    let most = 0;
    for (let i = 0; i < this.#facings.length; i++) {
      if (this.#facings[i] === -1 || !this.#hasMoved(i)) continue;
      const asIs = this.#disagreement(i, 1);
      const turned = this.#disagreement(i, -1);
      if (turned > DECISIVE * asIs || asIs - turned <= most) continue;
      worst = i;
      most = asIs - turned;
    }
    if (worst >= 0) this.#facings[worst] = -1;
    return worst >= 0;
  }

  #byMotion(i: number): Verdict {
    if (this.#facings[i] === -1) return "facing the tail";
    if (!this.#hasMoved(i)) return "unclear";
    return this.#disagreement(i, 1) < DECISIVE * this.#disagreement(i, -1) ? "as its neighbours" : "unclear";
  }

  /** Whether sensor `i` moved enough to tell. */
  #hasMoved(i: number): boolean {
    for (let g = Math.max(0, i - 1); g <= Math.min(i, this.#gapCount.length - 1); g++) {
      const own = this.#gaps[g * Sum.SIZE + (g === i ? Sum.BEFORE : Sum.BEHIND)]!;
      if (!(own > MOVED * MOVED * this.#gapCount[g]!)) return false;
    }
    return true;
  }

  /** Squared disagreement on both sides of sensor `i` if it faces the way `sign` says, the others as they are taken now. */
  #disagreement(i: number, sign: number): number {
    let sum = 0;
    for (let g = Math.max(0, i - 1); g <= Math.min(i, this.#gapCount.length - 1); g++) {
      const before = g === i ? sign : this.#facings[g]!;
      const behind = g === i ? this.#facings[g + 1]! : sign;
      const at = g * Sum.SIZE;
      sum += this.#gaps[at + Sum.BEHIND]! + this.#gaps[at + Sum.BEFORE]! + this.#gaps[at + Sum.PIECE]!;
      sum -= 2 * behind * (before * this.#gaps[at + Sum.BOTH]! + this.#gaps[at + Sum.PIECE_BEHIND]!);
      sum += 2 * before * this.#gaps[at + Sum.PIECE_BEFORE]!;
    }
    return sum;
  }
}
