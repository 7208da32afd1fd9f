/**
 * Sensors that fuse on board and send quaternions. Where a sensor sends no raw readings, its own orientation is taken as
 * it is; where raw readings come too, ours counts, and how far its own differs is told.
 *
 * Its own earth axes have some other idea of north, and its heading may drift: of the heading's difference the slow mean
 * is left out. What differs is given as RMS over about a second: a sensor that only lags swings to and fro.
 */
import { HAS_ORIENTATION, type Sweep } from "../sweep.ts";

/** Slow mean of the heading's difference, and the time over which differences are squared and averaged, s. */
const SLOW_S = 10;
const RMS_S = 1;

/** Slots of a sensor: squared tilt and turn, cosine and sine of the slow mean. */
const SIZE = 4;

export class OnBoard {
  /** 1 where the orientation is the sensor's own. */
  readonly used: Uint8Array;
  /** RMS difference of inclination and of heading, rad; NaN until both orientations are there. */
  readonly tilt: Float64Array;
  readonly turn: Float64Array;
  readonly #states: Float64Array;
  readonly #timeS: Float64Array;

  constructor(sensorCount: number) {
    this.used = new Uint8Array(sensorCount);
    this.tilt = new Float64Array(sensorCount);
    this.turn = new Float64Array(sensorCount);
    this.#states = new Float64Array(sensorCount * SIZE);
    this.#timeS = new Float64Array(sensorCount);
    this.reset();
  }

  reset(): void {
    this.used.fill(0);
    this.tilt.fill(Number.NaN);
    this.turn.fill(Number.NaN);
    this.#timeS.fill(-Infinity);
  }

  /**
   * Takes what this sweep has of a sensor.
   * @param ours whether `orientations` (body axes to earth, 4 a sensor) has one from raw readings: it is compared; else the
   *   sensor's own goes there
   * @param lostAfterS a quaternion older than this is not used
   * @returns time since the newest quaternion where it is used, s; NaN where not
   */
  take(sweep: Sweep, sensor: number, ours: boolean, orientations: Float64Array, lostAfterS: number): number {
    const came = (sweep.present[sensor]! & HAS_ORIENTATION) !== 0;
    if (came) this.#timeS[sensor] = sweep.timeS;
    const ageS = sweep.timeS - this.#timeS[sensor]!;
    const used = !ours && ageS <= lostAfterS;
    this.used[sensor] = used ? 1 : 0;
    if (came && ours) this.#compare(sweep, sensor, orientations);
    else if (came) for (let i = 4 * sensor; i < 4 * sensor + 4; i++) orientations[i] = sweep.onBoardBody[i]!;
    return used ? ageS : Number.NaN;
  }

  #compare(sweep: Sweep, sensor: number, orientations: Float64Array): void {
    const at = 4 * sensor;
    const own = sweep.onBoardBody;
    const w = own[at]!;
    const x = own[at + 1]!;
    const y = own[at + 2]!;
    const z = own[at + 3]!;
    const aw = orientations[at]!;
    const ax = orientations[at + 1]!;
    const ay = orientations[at + 2]!;
    const az = orientations[at + 3]!;
    // own · conj(ours), in earth axes.
    const dw = w * aw + x * ax + y * ay + z * az;
    const dx = x * aw - w * ax + z * ay - y * az;
    const dy = y * aw - w * ay + x * az - z * ax;
    const dz = z * aw - w * az + y * ax - x * ay;
    const tilt = 2 * Math.atan2(Math.sqrt(dx * dx + dy * dy), Math.sqrt(dw * dw + dz * dz));
    // The heading's difference as cosine and sine, from the half angle.
    const square = dw * dw + dz * dz;
    const cosine = square > 0 ? (dw * dw - dz * dz) / square : 1;
    const sine = square > 0 ? (2 * dw * dz) / square : 0;
    this.#average(sensor, sweep.stepS, tilt, cosine, sine);
  }

  #average(sensor: number, stepS: number, tilt: number, cosine: number, sine: number): void {
    const s = this.#states;
    const at = SIZE * sensor;
    if (Number.isNaN(this.tilt[sensor]!)) {
      s[at] = tilt * tilt;
      s[at + 1] = 0;
      s[at + 2] = cosine;
      s[at + 3] = sine;
    }
    const slow = Math.min(1, stepS / SLOW_S);
    s[at + 2]! += slow * (cosine - s[at + 2]!);
    s[at + 3]! += slow * (sine - s[at + 3]!);
    const turn = Math.atan2(sine * s[at + 2]! - cosine * s[at + 3]!, cosine * s[at + 2]! + sine * s[at + 3]!);
    const share = Math.min(1, stepS / RMS_S);
    s[at]! += share * (tilt * tilt - s[at]!);
    s[at + 1]! += share * (turn * turn - s[at + 1]!);
    this.tilt[sensor] = Math.sqrt(s[at]!);
    this.turn[sensor] = Math.sqrt(s[at + 1]!);
  }
}
