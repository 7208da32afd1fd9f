/**
 * Saturation: a reading at the end of its range, or on a plateau below it (a hub set to a smaller range than the model
 * says, a filter that limits). Clipped readings set their condition bit at once; a plateau's own first readings cannot be
 * known for what they are, later ones at the same level are marked at once.
 */
import { CHANNELS, CONDITION, type Sweep } from "../sweep.ts";
import type { FlagKind } from "../wire/flag.ts";
import { FlatTops } from "./flat-tops.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import { AXIS_NAMES, limitsOf, PARTS } from "./limits.ts";
import type { HealthSetup } from "./setup.ts";
import { RollingSum } from "./windows.ts";

const KINDS: readonly FlagKind[] = ["gyro saturation", "accel saturation", "mag saturation"];
/** Ends so long after the last clipped reading, s: longer than a beat, so that one flag spans a run of clipped beats. */
const QUIET_S = 1;
/** Clipped for this share of a second, orientation and wave are lost, not blemished. */
const ALARM_SHARE = 0.05;

export class Saturation {
  readonly #setup: HealthSetup;
  /** Readings at or above this are at full scale; sensors x parts, Infinity where there is no such part. */
  readonly #fullScale: Float64Array;
  /** Readings a second. */
  readonly #due: Float64Array;
  readonly #flatTops: FlatTops;
  readonly #state: Hysteresis;
  readonly #clipped: RollingSum;
  /** Bits of the axes clipped in this episode, and whether any was at full scale. */
  readonly #axes: Uint8Array;
  readonly #atFullScale: Uint8Array;

  constructor(setup: HealthSetup) {
    const rows = setup.sensors.length * PARTS.length;
    this.#setup = setup;
    const limits = setup.sensors.flatMap((sensor) => limitsOf(sensor, setup.rateHz));
    const share = setup.thresholds.fullScaleShare;
    this.#fullScale = Float64Array.from(limits, (l) => (l ? l.range * share : Number.POSITIVE_INFINITY));
    this.#due = Float64Array.from(limits, (l) => l?.rateHz ?? 1);
    this.#flatTops = new FlatTops(setup);
    this.#state = new Hysteresis(rows, 0, QUIET_S);
    this.#clipped = new RollingSum(rows, 1, 10);
    this.#axes = new Uint8Array(rows);
    this.#atFullScale = new Uint8Array(rows);
  }

  /** Needs the gaps of this sweep marked. */
  observe(sweep: Sweep): void {
    this.#clipped.advance(sweep.timeS);
    this.#flatTops.advance(sweep.timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      for (let p = 0; p < PARTS.length; p++) {
        if ((sweep.present[i]! & PARTS[p]!.has) !== 0) this.#part(sweep, i, p);
      }
    }
  }

  #part(sweep: Sweep, i: number, p: number): void {
    const row = i * PARTS.length + p;
    const at = i * CHANNELS + PARTS[p]!.at;
    const now = this.#clippedAxes(sweep, i, p);
    let behind = 0;
    for (let k = 0; k < 3; k++) {
      const readings = this.#flatTops.foundBehind[at + k]!;
      if (readings > 0) this.#axes[row]! |= 1 << k;
      behind = Math.max(behind, readings);
    }
    this.#axes[row]! |= now;
    this.#clipped.add(row, behind + (now === 0 ? 0 : 1));
    if (now !== 0) sweep.conditions[i]! |= PARTS[p]!.clipped;
    const bad = now !== 0 || behind > 0;
    const share = Math.min(1, this.#clipped.sum(row) / this.#due[row]!);
    const turn = this.#state.step(row, sweep.timeS, bad, !bad, share);
    if (turn === Turn.REPORT) this.#report(i, p);
    else if (turn === Turn.END) {
      this.#setup.book.clear(KINDS[p]!, i, this.#state.lastBadS[row]!);
      this.#axes[row] = 0;
      this.#atFullScale[row] = 0;
    }
  }

  /** Bits of the axes that are clipped in this reading. */
  #clippedAxes(sweep: Sweep, i: number, p: number): number {
    const row = i * PARTS.length + p;
    const at = i * CHANNELS + PARTS[p]!.at;
    let axes = 0;
    for (let k = 0; k < 3; k++) {
      if (Math.abs(sweep.raw[at + k]!) >= this.#fullScale[row]!) axes |= 1 << k;
    }
    if (axes !== 0) this.#atFullScale[row] = 1;
    return axes | this.#flatTops.reading(sweep.raw, i, p, (sweep.conditions[i]! & CONDITION.GAP) !== 0);
  }

  #report(i: number, p: number): void {
    const row = i * PARTS.length + p;
    const share = this.#state.worst[row]!;
    const where = AXIS_NAMES.filter((_, k) => ((this.#axes[row]! >> k) & 1) === 1).join(", ");
    const how = this.#atFullScale[row] === 1 ? "at full scale" : "flat-topped below full scale";
    this.#setup.book.raise(
      KINDS[p]!,
      i,
      share >= ALARM_SHARE ? "alarm" : "caution",
      this.#state.sinceS[row]!,
      `${how} on ${where}, up to ${Math.max(1, Math.round(share * 100))} % of a second`,
    );
  }
}
