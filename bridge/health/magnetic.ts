/**
 * Steady magnetic interference: the field at a sensor is not the reference field (field-reference.ts), by norm or dip.
 * Whose trouble it is, spread.ts tells. A field that alternates is another matter (alternating-field.ts).
 */
import { DEG_PER_RAD } from "../numeric/units.ts";
import { CONDITION, type Sweep } from "../sweep.ts";
import { FieldMeter } from "./field-meter.ts";
import { FieldReference } from "./field-reference.ts";
import { Hysteresis } from "./hysteresis.ts";
import type { HealthSetup } from "./setup.ts";
import { Spread } from "./spread.ts";

/** Wait so long for the other sensors before saying whose trouble it is, s. */
const CONFIRM_S = 0.4;
const QUIET_S = 1;
/** Calm below this share of the threshold. */
const RELEASE = 2 / 3;
/** The horizontal part, which heading hangs on, is about this share of the field in middle latitudes. */
const ALARM_OFF = 0.4;
const NOTICE_SHOWN_S = 10;
const RIG = "rig-wide magnetic interference";

export class MagneticInterference {
  readonly #setup: HealthSetup;
  readonly #reference: FieldReference;
  readonly #meter: FieldMeter;
  readonly #disturbed: Hysteresis;
  readonly #spread: Spread;
  /** When each was worst: norm over the reference's, and dip less its, rad. */
  readonly #norm: Float64Array;
  readonly #dip: Float64Array;
  #noticeUntilS = Number.NaN;

  constructor(setup: HealthSetup) {
    const count = setup.sensors.length;
    const able = setup.sensors.filter((sensor) => sensor.model.mag !== undefined).length;
    this.#setup = setup;
    this.#reference = new FieldReference(count, setup.expectedField, setup.thresholds.fieldOffShare);
    this.#meter = new FieldMeter(count, this.#reference);
    this.#disturbed = new Hysteresis(count, 0, QUIET_S);
    this.#norm = new Float64Array(count);
    this.#dip = new Float64Array(count);
    this.#spread = new Spread(setup, this.#disturbed, able, {
      one: "magnetic interference",
      several: "magnetic interference at several sensors",
      rig: RIG,
      confirmS: CONFIRM_S,
      quietS: QUIET_S,
      detail: (i) => this.#detail(i),
      severity: (i) => (this.#disturbed.worst[i]! >= ALARM_OFF ? "alarm" : "caution"),
      rigSeverity: "alarm",
      rigDetail: (off) => `field off at ${off} of ${able} sensors`,
      beforeRig: (timeS) => this.#endNotice(timeS),
    });
  }

  /** Share by which the field at each sensor is off; NaN without magnetometer or before there is a reference. */
  get fieldOff(): Float64Array {
    return this.#meter.off;
  }

  /**
   * Needs this sweep's clipped and stuck readings told to the book.
   * @param orientations as of the sweep before
   * @param inclinationSigma rad, by sensor
   */
  observe(sweep: Sweep, orientations: Float64Array, inclinationSigma: Float64Array): void {
    const { timeS } = sweep;
    if (this.#reference.advance(timeS)) this.#noticeBuilding(timeS);
    if (timeS >= this.#noticeUntilS) this.#endNotice(timeS);
    for (let i = 0; i < sweep.sensorCount; i++) {
      if (this.#meter.read(sweep, i, orientations, inclinationSigma)) this.#judge(i, timeS);
      if (this.#disturbed.on[i] === 1 && this.#isOff(i)) sweep.conditions[i]! |= CONDITION.MAG_DISTURBED;
    }
    for (let i = 0; i < sweep.sensorCount; i++) if (this.#isSound(i)) this.#spread.confirm(i, timeS);
    this.#spread.judgeRig(timeS);
  }

  #judge(i: number, timeS: number): void {
    const off = this.#meter.off[i]!;
    const limit = this.#setup.thresholds.fieldOffShare;
    const turn = this.#disturbed.step(i, timeS, off >= limit, !(off >= limit * RELEASE), off);
    if (off >= limit && off === this.#disturbed.worst[i]) this.#note(i);
    this.#spread.turned(i, turn);
  }

  #isOff(i: number): boolean {
    return this.#meter.off[i]! >= this.#setup.thresholds.fieldOffShare * RELEASE;
  }

  /** Disturbed, and not because its magnetometer or its vertical is broken. */
  #isSound(i: number): boolean {
    if (this.#disturbed.on[i] === 0 || !this.#isOff(i)) return false;
    const { book } = this.#setup;
    return book.find("mag saturation", i) === null && book.find("stuck axis", i) === null;
  }

  #note(i: number): void {
    const { normUT, horizontalUT, downUT } = this.#reference;
    const { norm, horizontal, down } = this.#meter;
    this.#norm[i] = norm[i]! / normUT;
    this.#dip[i] = Math.atan2(down[i]!, horizontal[i]!) - Math.atan2(downUT, horizontalUT);
  }

  #detail(i: number): string {
    const worst = Math.round(this.#disturbed.worst[i]! * 100);
    const norm = signed((this.#norm[i]! - 1) * 100);
    return `field up to ${worst} % off: norm ${norm} %, dip ${signed(this.#dip[i]! * DEG_PER_RAD)}°`;
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

function signed(value: number): string {
  const whole = Math.round(value);
  return whole < 0 ? `−${-whole}` : `+${whole}`;
}
