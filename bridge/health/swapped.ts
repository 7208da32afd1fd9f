/**
 * Two sensors exchanged: the wave along the swimming body reaches them in the wrong order. It looks at the rate of turn
 * about the vertical, which a sensor gives however it is mounted.
 */
import { PhaseOrder } from "../numeric/phase-order.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import { ACCEL, CHANNELS, CONDITION, GYRO, HAS_INERTIAL, type Sweep } from "../sweep.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

const KIND = "sensors swapped";
/** A few beats. */
const WINDOW_S = 4;
/** Two windows running say the same: judged at their ends, so the second comes one window after the first. */
const ONSET_S = WINDOW_S / 2;
const QUIET_S = WINDOW_S / 2;
/** Time constant of the mean force (the vertical) and of the mean rate that is taken off, s. */
const MEAN_S = 1;
/** Beats need no more than this many looks a second. */
const LOOKS_HZ = 50;
/** Below this RMS rate a sensor does not wave, rad/s: 6°/s, well above noise and the rocking of a still body. */
const WAVING = 0.1;
const BROKEN = CONDITION.STUCK | CONDITION.READ_FAILED | CONDITION.GYRO_CLIPPED | CONDITION.ACCEL_CLIPPED;

export class SwappedSensors {
  readonly #setup: HealthSetup;
  readonly #order: PhaseOrder;
  readonly #state: Hysteresis;
  /** Mean force, sensors x 3, and mean rate about it. */
  readonly #up: Float64Array;
  readonly #meanRate: Float64Array;
  readonly #signals: Float64Array;
  #lookS = Number.NEGATIVE_INFINITY;
  #windowEndS = Number.NaN;
  #outOfOrder = false;
  /** The other of the pair that the open flags speak of, by sensor; -1 for none. */
  readonly #partner: Int16Array;

  constructor(setup: HealthSetup) {
    const n = setup.sensors.length;
    this.#setup = setup;
    this.#order = new PhaseOrder(setup.sensors.map((sensor) => sensor.station));
    this.#state = new Hysteresis(n, ONSET_S, QUIET_S);
    this.#up = new Float64Array(3 * n);
    this.#meanRate = new Float64Array(n);
    this.#signals = new Float64Array(n);
    this.#partner = new Int16Array(n).fill(-1);
  }

  /** Whether the last window in which an order showed had two sensors exchanged. */
  get outOfOrder(): boolean {
    return this.#outOfOrder;
  }

  /** Needs this sweep's broken readings marked. */
  observe(sweep: Sweep): void {
    const { timeS } = sweep;
    if (!(timeS < this.#windowEndS)) {
      if (timeS - this.#windowEndS < WINDOW_S) this.#judge(timeS);
      this.#order.reset();
      this.#windowEndS = timeS + WINDOW_S;
    }
    const spanS = timeS - this.#lookS;
    if (spanS < 1 / LOOKS_HZ - 1e-4) return;
    this.#lookS = timeS;
    const weight = Math.min(1, spanS / MEAN_S);
    for (let i = 0; i < sweep.sensorCount; i++) {
      const whole = (sweep.present[i]! & HAS_INERTIAL) === HAS_INERTIAL;
      const good = whole && (sweep.conditions[i]! & BROKEN) === 0;
      this.#signals[i] = good ? this.#rateAboutVertical(sweep, i, weight) : Number.NaN;
    }
    this.#order.add(timeS, this.#signals);
  }

  #rateAboutVertical({ values }: Sweep, i: number, weight: number): number {
    const at = i * CHANNELS;
    let along = 0;
    let square = 0;
    for (let k = 0; k < 3; k++) {
      this.#up[3 * i + k]! += weight * (values[at + ACCEL + k]! - this.#up[3 * i + k]!);
      along += this.#up[3 * i + k]! * values[at + GYRO + k]!;
      square += this.#up[3 * i + k]! ** 2;
    }
    const rate = along / Math.sqrt(square);
    this.#meanRate[i]! += weight * (rate - this.#meanRate[i]!);
    return rate - this.#meanRate[i]!;
  }

  #judge(timeS: number): void {
    const order = this.#order.judge(WAVING, this.#setup.thresholds.reversedLagDeg * RAD_PER_DEG);
    if (order.kind === "unclear") return;
    this.#outOfOrder = order.kind === "swapped";
    for (let i = 0; i < this.#partner.length; i++) {
      const bad = order.kind === "swapped" && order.first === i;
      if (bad) this.#partner[i] = order.second;
      const turn = this.#state.step(i, timeS, bad);
      if (turn === Turn.REPORT && bad) this.#report(i);
      else if (turn === Turn.END) this.#setup.book.clear(KIND, i, this.#state.lastBadS[i]!);
    }
  }

  #report(i: number): void {
    const other = this.#setup.sensors[this.#partner[i]!]!.name;
    const detail = `the wave runs backwards unless it changes places with ${other}`;
    this.#setup.book.raise(KIND, i, "alarm", this.#state.sinceS[i]!, detail);
  }
}
