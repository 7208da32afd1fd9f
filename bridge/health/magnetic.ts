/**
 * Magnetic interference: the field at a sensor is not the reference field (field-reference.ts), and whether that is one
 * sensor's neighbourhood or the whole rig's. When at least half of the sensors, and at least three, go off within half a
 * second of each other, the cause is none of theirs: one flag for the rig.
 */
import { DEG_PER_RAD } from "../numeric/units.ts";
import { CONDITION, type Sweep } from "../sweep.ts";
import { FieldMeter } from "./field-meter.ts";
import { FieldReference } from "./field-reference.ts";
import { Hysteresis, Turn } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";

/** Wait so long for the other sensors before saying whose trouble it is, s. */
const CONFIRM_S = 0.4;
const TOGETHER_S = 0.5;
const LEAST_TOGETHER = 3;
const QUIET_S = 1;
/** Calm below this share of the threshold. */
const RELEASE = 2 / 3;
/** The horizontal part, which heading hangs on, is about this share of the field in middle latitudes. */
const ALARM_OFF = 0.4;
const NOTICE_SHOWN_S = 10;
const RIG = "rig-wide magnetic interference";

/** Who speaks for a disturbed sensor. */
const Told = { NOBODY: 0, ITSELF: 1, RIG: 2 } as const;

export class MagneticInterference {
  readonly #setup: HealthSetup;
  readonly #reference: FieldReference;
  readonly #meter: FieldMeter;
  readonly #disturbed: Hysteresis;
  readonly #told: Uint8Array;
  readonly #rig = new Hysteresis(1, 0, 0);
  #rigSinceS = 0;
  readonly #withMag: number;
  readonly #enough: number;
  #noticeUntilS = Number.NaN;

  constructor(setup: HealthSetup) {
    const count = setup.sensors.length;
    this.#setup = setup;
    this.#reference = new FieldReference(count, setup.expectedField, setup.thresholds.fieldOffShare);
    this.#meter = new FieldMeter(count, this.#reference);
    this.#disturbed = new Hysteresis(count, 0, QUIET_S);
    this.#told = new Uint8Array(count);
    this.#withMag = setup.sensors.filter((sensor) => sensor.model.mag !== undefined).length;
    this.#enough = Math.max(LEAST_TOGETHER, Math.ceil(this.#withMag / 2));
  }

  /** Share by which the field at each sensor is off; NaN without magnetometer or before there is a reference. */
  get fieldOff(): Float64Array {
    return this.#meter.off;
  }

  /** Needs this sweep's clipped and stuck readings told to the book. @param orientations as of the sweep before */
  observe(sweep: Sweep, orientations: Float64Array): void {
    const { timeS } = sweep;
    if (this.#reference.advance(timeS)) this.#noticeBuilding(timeS);
    if (timeS >= this.#noticeUntilS) this.#endNotice(timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (this.#meter.read(sweep, i, orientations)) this.#judge(i, timeS);
      if (this.#disturbed.on[i] === 1 && this.#isOff(i)) sweep.conditions[i]! |= CONDITION.MAG_DISTURBED;
    }
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (this.#told[i] === Told.NOBODY && this.#isConfirmed(i, timeS)) this.#tell(i);
    }
    this.#judgeRig(timeS);
  }

  #judge(i: number, timeS: number): void {
    const off = this.#meter.off[i]!;
    const limit = this.#setup.thresholds.fieldOffShare;
    const turn = this.#disturbed.step(i, timeS, off >= limit, !(off >= limit * RELEASE), off);
    if (turn === Turn.REPORT && this.#told[i] === Told.ITSELF) this.#report(i);
    if (turn !== Turn.END) return;
    if (this.#told[i] === Told.ITSELF) {
      this.#setup.book.clear("magnetic interference", i, this.#disturbed.lastBadS[i]!);
    }
    this.#told[i] = Told.NOBODY;
  }

  #isOff(i: number): boolean {
    return this.#meter.off[i]! >= this.#setup.thresholds.fieldOffShare * RELEASE;
  }

  /** Disturbed for long enough to be told, and not because its magnetometer or its vertical is broken. */
  #isConfirmed(i: number, timeS: number): boolean {
    if (this.#disturbed.on[i] === 0 || !this.#isOff(i)) return false;
    if (timeS - this.#disturbed.sinceS[i]! < CONFIRM_S) return false;
    const { book } = this.#setup;
    return book.find("mag saturation", i) === null && book.find("stuck axis", i) === null;
  }

  /** Says whose trouble it is. */
  #tell(i: number): void {
    const sinceS = this.#disturbed.sinceS[i]!;
    const joins = this.#rig.on[0] === 1 && sinceS >= this.#rigSinceS - TOGETHER_S;
    let together = 0;
    for (let j = 0; j < this.#told.length; j++) if (this.#isWith(j, sinceS)) together++;
    if (!joins && together < this.#enough) {
      this.#told[i] = Told.ITSELF;
      this.#report(i);
      return;
    }
    if (this.#rig.on[0] === 0) this.#rigSinceS = sinceS;
    for (let j = 0; j < this.#told.length; j++) if (this.#isWith(j, sinceS)) this.#told[j] = Told.RIG;
  }

  /** Sensor `j` went off together with one that did at `sinceS`, and has no flag of its own. */
  #isWith(j: number, sinceS: number): boolean {
    const near = Math.abs(this.#disturbed.sinceS[j]! - sinceS) <= TOGETHER_S;
    return near && this.#disturbed.on[j] === 1 && this.#told[j] !== Told.ITSELF;
  }

  #report(i: number): void {
    const off = this.#disturbed.worst[i]!;
    this.#setup.book.raise(
      "magnetic interference",
      i,
      off >= ALARM_OFF ? "alarm" : "caution",
      this.#disturbed.sinceS[i]!,
      `field up to ${Math.round(off * 100)} % off`,
    );
  }

  #judgeRig(timeS: number): void {
    let count = 0;
    for (let i = 0; i < this.#told.length; i++) if (this.#told[i] === Told.RIG) count++;
    const turn = this.#rig.step(0, timeS, count >= this.#enough, count < this.#enough, count);
    if (turn === Turn.REPORT) {
      this.#endNotice(timeS);
      const detail = `field off at ${this.#rig.worst[0]} of ${this.#withMag} sensors`;
      this.#setup.book.raise(RIG, -1, "alarm", this.#rigSinceS, detail);
    } else if (turn === Turn.END) {
      this.#setup.book.clear(RIG, -1, timeS - QUIET_S);
      // Those still off speak for themselves from now on.
      for (let i = 0; i < this.#told.length; i++) if (this.#told[i] === Told.RIG) this.#told[i] = Told.NOBODY;
    }
  }

  #noticeBuilding(timeS: number): void {
    const { offExpected, normUT, downUT } = this.#reference;
    if (offExpected < this.#setup.thresholds.fieldOffShare) return;
    const dipDeg = Math.asin(downUT / normUT) * DEG_PER_RAD;
    const here = `${normUT.toFixed(1)} µT, dip ${Math.round(dipDeg)}°`;
    const detail = `field here ${here}: ${Math.round(offExpected * 100)} % off the Earth's at this site`;
    this.#setup.book.raise(RIG, -1, "notice", timeS, detail, "building field");
    this.#noticeUntilS = timeS + NOTICE_SHOWN_S;
  }

  #endNotice(timeS: number): void {
    if (Number.isNaN(this.#noticeUntilS)) return;
    this.#setup.book.clear(RIG, -1, timeS);
    this.#noticeUntilS = Number.NaN;
  }
}
