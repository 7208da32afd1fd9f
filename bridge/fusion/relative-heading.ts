/**
 * Relative heading: what the body can and cannot do holds the headings of neighbouring sensors together, without any
 * magnetometer (gap-window.ts says how a gap is measured, sideways-bias.ts what the accelerometers add to it, gap-filter.ts
 * how that becomes a correction).
 *
 * It sees the heading of each sensor against its neighbours while the body swims. It does not see the heading of the
 * chain as a whole, which rests on the mean of all gyroscopes and drifts with it; and while the body is still it sees
 * nothing: then each gap drifts by what is left of the gyroscopes' biases, and its sigma grows.
 *
 * All gaps are corrected together so that the mean heading of the chain does not turn.
 *
 * Each sensor is held by the gap to the next one ahead of it. When a sensor is lost, the gaps on both sides become one,
 * with the knowledge of both. When it is back it hangs on the one ahead, and the sensor behind goes on without it until
 * the new gap is held; then the gap across both is parted. Sensors without raw readings are passed over like lost ones.
 */
import { CONDITION, HAS_INERTIAL, type Sweep, TRUST } from "../sweep.ts";
import { addGap, advanceGap, Gap, gapSigma, measureGap, resetGap } from "./gap-filter.ts";
import {
  addMotion,
  type BiasShare,
  clearSums,
  evaluate,
  type GapMeasurement,
  isExcited,
  Window,
} from "./gap-window.ts";
import { Slot } from "./record.ts";
import { Motion, takeMotion } from "./sensor-motion.ts";
import { SidewaysBias } from "./sideways-bias.ts";

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
/** Motion is added once this long, s: often enough behind a low-pass of 8 Hz, and it saves half of the work or more. */
const SPAN_S = 0.015;
/** A gap is held while its standard deviation is below this, rad: 6°. */
const HELD = 0.105;
/** What spoils a reading for this purpose. */
const SPOILT = CONDITION.ACCEL_CLIPPED | CONDITION.STUCK | CONDITION.READ_FAILED;
/** Instead of the sensor ahead. */
const NONE = -1;

export class RelativeHeading {
  /** Standard deviation of the heading between each sensor behind the first and the sensor that it is held against, rad. */
  readonly sigma: Float64Array;
  /** To add to each sensor's heading after a step, rad. */
  readonly turns: Float64Array;
  /** TRUST codes: what the heading of each sensor is worth, good, settling or unaided, as the gaps on both sides are held. */
  readonly trust: Uint8Array;
  readonly #body: ChainBody;
  readonly #motions: readonly Float64Array[];
  /** Whether each sensor's reading of this sweep can be used; and whether it has an orientation. */
  readonly #usable: Uint8Array;
  readonly #there: Uint8Array;
  /** The sensor that each is held against, always further ahead, or NONE; and 1 while the one behind goes on without it. */
  readonly #ahead: Int32Array;
  readonly #waiting: Uint8Array;
  /** By sensor: of the gap ahead of it. */
  readonly #gaps: readonly Float64Array[];
  readonly #windows: readonly Float64Array[];
  readonly #biases: SidewaysBias;
  readonly #measured: GapMeasurement = { error: 0, random: 0, lasting: 0 };
  readonly #biasShare: BiasShare = { angle: 0, variance: 0 };

  constructor(body: ChainBody) {
    const count = body.stations.length;
    this.#body = body;
    this.sigma = new Float64Array(Math.max(0, count - 1));
    this.turns = new Float64Array(count);
    this.trust = new Uint8Array(count);
    this.#motions = body.stations.map(() => new Float64Array(Motion.SIZE));
    this.#usable = new Uint8Array(count);
    this.#there = new Uint8Array(count);
    this.#ahead = new Int32Array(count);
    this.#waiting = new Uint8Array(count);
    this.#gaps = body.stations.map(() => new Float64Array(Gap.SIZE));
    this.#windows = body.stations.map(() => new Float64Array(Window.SIZE));
    this.#biases = new SidewaysBias(count);
    this.reset();
  }

  /** Nothing is known of any gap. */
  reset(): void {
    for (const motion of this.#motions) motion.fill(0);
    this.#there.fill(0);
    for (let sensor = 0; sensor < this.#ahead.length; sensor++) this.#hang(sensor, NONE);
    this.#state();
  }

  /**
   * One sweep, after all orientations are up to date.
   * @param records of the fusion
   * @param orientations body axes to earth, 4 a sensor
   */
  step(sweep: Sweep, records: readonly Float64Array[], orientations: Float64Array): void {
    for (let i = 0; i < records.length; i++) {
      const there = records[i]![Slot.STARTED]!;
      if (there !== this.#there[i]) {
        this.#there[i] = there;
        if (there === 1) this.#join(i);
        else this.#leave(i);
      }
      const usable =
        there === 1 &&
        (sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL &&
        (sweep.conditions[i]! & SPOILT) === 0;
      const taken = usable && takeMotion(this.#motions[i]!, records[i]!, orientations, sweep.values, i);
      this.#usable[i] = taken ? 1 : 0;
    }
    for (let sensor = 1; sensor < records.length; sensor++) {
      this.#gaps[sensor]![Gap.STEP] = sweep.stepS;
      if (this.#ahead[sensor] !== NONE) this.#follow(sensor, records);
    }
    this.#shareTurns();
    this.#state();
  }

  /** Adds the newest readings to a sensor's gap, and closes its window when it is due. */
  #follow(sensor: number, records: readonly Float64Array[]): void {
    const ahead = this.#ahead[sensor]!;
    const g = this.#gaps[sensor]!;
    const window = this.#windows[sensor]!;
    if (this.#usable[ahead] === 1 && this.#usable[sensor] === 1) window[Window.STEP]! += g[Gap.STEP]!;
    else if (window[Window.STEP]! > 0) window[Window.STEP] = 0;
    if (window[Window.STEP]! >= SPAN_S) {
      window[Window.ERROR] = g[Gap.ERROR]!;
      const beat = addMotion(window, this.#motions[ahead]!, this.#motions[sensor]!);
      const timeS = window[Window.TIME]!;
      if (timeS > LONGEST_WINDOW_S || (beat && timeS > WINDOW_S)) this.#close(sensor, beat);
    }
    const before = records[ahead]!;
    const behind = records[sensor]!;
    const atRest = before[Slot.AT_REST] === 1 && behind[Slot.AT_REST] === 1;
    const clipped = before[Slot.CLIPPED] === 1 || behind[Slot.CLIPPED] === 1;
    advanceGap(g, atRest, clipped);
    if (this.#waiting[sensor] === 1 && gapSigma(g) < HELD) this.#part(sensor);
  }

  #close(sensor: number, beat: boolean): void {
    const window = this.#windows[sensor]!;
    if (isExcited(window)) {
      this.#biases.observe(window, sensor, this.#ahead);
      this.#biases.shareOf(window, this.#ahead[sensor]!, sensor, this.#biasShare);
      evaluate(window, beat, this.#biasShare, this.#measured);
      const timeS = window[Window.TIME]!;
      measureGap(this.#gaps[sensor]!, this.#measured, window[Window.EXPECTED]! / timeS, timeS);
    }
    clearSums(window);
  }

  /** A sensor has an orientation again: it hangs on the next one ahead; were it the first, the next one hangs on it. */
  #join(sensor: number): void {
    let ahead = sensor - 1;
    while (ahead >= 0 && this.#there[ahead] === 0) ahead--;
    this.#hang(sensor, ahead);
    const behind = this.#lineAfter(ahead, sensor);
    if (behind === NONE) return;
    if (ahead === NONE) this.#hang(behind, sensor);
    else this.#waiting[sensor] = 1;
  }

  /** A sensor's orientation is lost: what hangs on it hangs on the one ahead of it, with the errors of both gaps. */
  #leave(sensor: number): void {
    const ahead = this.#ahead[sensor]!;
    for (let behind = sensor + 1; behind < this.#ahead.length; behind++) {
      if (this.#ahead[behind] !== sensor) continue;
      if (ahead !== NONE) addGap(this.#gaps[behind]!, this.#gaps[sensor]!, 1);
      this.#span(behind, ahead);
    }
    this.#hang(sensor, NONE);
  }

  /** The gap of a sensor that has been out of the line is held: it goes back into the line. */
  #part(sensor: number): void {
    this.#waiting[sensor] = 0;
    const ahead = this.#ahead[sensor]!;
    const behind = this.#lineAfter(ahead, sensor);
    if (behind === NONE) return;
    addGap(this.#gaps[behind]!, this.#gaps[sensor]!, -1);
    this.#span(behind, sensor);
  }

  /** The first sensor behind `sensor` that hangs on `ahead` and is in the line, or NONE. */
  #lineAfter(ahead: number, sensor: number): number {
    for (let behind = sensor + 1; behind < this.#ahead.length; behind++) {
      const inLine = this.#there[behind] === 1 && this.#waiting[behind] === 0;
      if (inLine && this.#ahead[behind] === ahead) return behind;
    }
    return NONE;
  }

  /** A sensor's gap begins anew, nothing known of it. */
  #hang(sensor: number, ahead: number): void {
    resetGap(this.#gaps[sensor]!);
    this.#waiting[sensor] = 0;
    this.#span(sensor, ahead);
  }

  /** A sensor's gap leads to another sensor. */
  #span(sensor: number, ahead: number): void {
    const { stations, lengthM, meanBend } = this.#body;
    const window = this.#windows[sensor]!;
    this.#ahead[sensor] = ahead;
    this.#biases.forget(sensor);
    window.fill(0);
    if (ahead === NONE) return;
    const share = stations[sensor]! - stations[ahead]!;
    window[Window.LENGTH] = share * lengthM;
    window[Window.MEAN_BEND] = -share * meanBend;
  }

  /** From the turn of each gap to that of each sensor: sums along the chain, less their mean. */
  #shareTurns(): void {
    const turns = this.turns;
    let count = 0;
    let mean = 0;
    for (let sensor = 0; sensor < turns.length; sensor++) {
      const ahead = this.#ahead[sensor]!;
      turns[sensor] = ahead === NONE ? 0 : turns[ahead]! - this.#gaps[sensor]![Gap.TURN]!;
      count += this.#there[sensor]!;
      mean += turns[sensor]!;
    }
    if (count > 0) mean /= count;
    for (let sensor = 0; sensor < turns.length; sensor++) turns[sensor]! -= this.#there[sensor]! * mean;
  }

  /** States sigma and trust. A gap speaks for both its sensors, unless the one behind is still out of the line. */
  #state(): void {
    const { sigma, trust } = this;
    trust.fill(this.#ahead.length > 1 ? TRUST.GOOD : TRUST.HEADING_UNAIDED);
    let linked = 0;
    for (let sensor = 1; sensor < trust.length; sensor++) {
      const g = this.#gaps[sensor]!;
      const ahead = this.#ahead[sensor]!;
      sigma[sensor - 1] = gapSigma(g);
      if (ahead === NONE) continue;
      linked++;
      if (sigma[sensor - 1]! <= HELD) continue;
      const worth = g[Gap.MEASURED] === 0 ? TRUST.SETTLING : TRUST.HEADING_UNAIDED;
      trust[sensor] = Math.max(trust[sensor]!, worth);
      if (this.#waiting[sensor] === 0) trust[ahead] = Math.max(trust[ahead]!, worth);
    }
    if (linked === 0) trust.fill(TRUST.HEADING_UNAIDED);
  }
}
