/**
 * What a real unit makes of what it feels: turned into its own axes by its mounting, given the faults that its calibration
 * in the rig file takes off again, a constant bias within its data sheet, white noise, whole counts and a limited range.
 */
import { conjugate, multiply, rotate } from "../numeric/quaternion.ts";
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import { ACCEL, GYRO, MAG } from "../sweep.ts";
import { setTurn } from "./attitude.ts";
import type { Random } from "./random.ts";

/** One three-axis part of a unit, in its own axes. */
export interface Part {
  /** SI or µT for one count. */
  readonly scale: number;
  /** Largest count either way. */
  readonly fullCounts: number;
  /** RMS of white noise in one reading. */
  readonly noise: number;
  /** Constant offset per axis: the unit's own and what the calibration takes off. */
  readonly bias: Float64Array;
  /** Largest offset of the unit's own. */
  readonly biasLimit: number;
}

/** Packets carry 16-bit counts. */
const MAX_BITS = 16;

export class NoisySensor {
  readonly gyro: Part;
  readonly accel: Part;
  /** null for a six-axis unit. */
  readonly mag: Part | null;

  readonly #random: Random;
  /** Body axes to the unit's own axes. */
  readonly #fromBody = new Float64Array(4);
  readonly #accelGain: Float64Array;
  /** Inverse of the soft-iron matrix, by rows. */
  readonly #ironGain: Float64Array;

  /**
   * @param rateHz sweeps a second: a unit filters its own noise to half of that
   * @param random for this unit alone
   */
  constructor(model: SensorModel, place: SensorPlace, rateHz: number, random: Random) {
    this.#random = random;
    const { calibration } = place;
    const bandwidth = Math.sqrt(rateHz / 2);
    const milliG = STANDARD_GRAVITY / 1000;
    this.gyro = this.#part(model.gyro.rangeDegPerS * RAD_PER_DEG, model.gyro.bits, {
      noise: model.gyro.noiseDegPerSPerSqrtHz * RAD_PER_DEG * bandwidth,
      biasLimit: model.gyro.biasDegPerS * RAD_PER_DEG,
      known: calibration.gyroBiasDegPerS.map((bias) => bias * RAD_PER_DEG),
    });
    this.accel = this.#part(model.accel.rangeG * STANDARD_GRAVITY, model.accel.bits, {
      noise: (model.accel.noiseMicroGPerSqrtHz / 1000) * milliG * bandwidth,
      biasLimit: model.accel.biasMilliG * milliG,
      known: calibration.accelBiasMPerS2,
    });
    this.mag =
      model.mag === undefined
        ? null
        : this.#part(model.mag.rangeUT, model.mag.bits, {
            noise: model.mag.noiseUT,
            biasLimit: 0,
            known: calibration.magHardIronUT,
          });
    this.#setMounting(place.mounting);
    this.#accelGain = Float64Array.from(calibration.accelScale, (scale) => 1 / scale);
    this.#ironGain = inverse(calibration.magSoftIron.flat());
  }

  /**
   * @param felt 9 numbers, body axes, as in sweep.ts
   * @param raw receives the reading at `at`, the unit's own axes. Draws the same count of random numbers every time.
   */
  read(felt: Float64Array, raw: Float64Array, at: number): void {
    for (const part of [GYRO, ACCEL, MAG]) rotate(raw, this.#fromBody, felt, at + part, 0, part);
    for (let axis = 0; axis < 3; axis++) raw[at + ACCEL + axis] *= this.#accelGain[axis];
    if (this.mag !== null) multiplyMatrix(this.#ironGain, raw, at + MAG);
    this.#measure(this.gyro, raw, at + GYRO);
    this.#measure(this.accel, raw, at + ACCEL);
    if (this.mag !== null) this.#measure(this.mag, raw, at + MAG);
  }

  #part(
    range: number,
    modelBits: number,
    { noise, biasLimit, known }: { noise: number; biasLimit: number; known: readonly number[] },
  ): Part {
    const bits = Math.min(modelBits, MAX_BITS);
    const fullCounts = 2 ** (bits - 1) - 1;
    const bias = Float64Array.from(known, (value) => value + this.#random.between(-biasLimit, biasLimit));
    return { scale: range / 2 ** (bits - 1), fullCounts, noise, bias, biasLimit };
  }

  #measure({ scale, fullCounts, noise, bias }: Part, raw: Float64Array, at: number): void {
    for (let axis = 0; axis < 3; axis++) {
      const value = raw[at + axis] + bias[axis] + noise * this.#random.normal();
      const counts = Math.round(value / scale);
      raw[at + axis] = scale * Math.min(fullCounts, Math.max(-fullCounts, counts));
    }
  }

  /** Yaw, then pitch, then roll, each right-handed, carry the body's axes onto the unit's. */
  #setMounting({ yawDeg, pitchDeg, rollDeg }: SensorPlace["mounting"]): void {
    const mounting = this.#fromBody;
    const turn = new Float64Array(4);
    setTurn(mounting, 3, yawDeg * RAD_PER_DEG);
    setTurn(turn, 2, pitchDeg * RAD_PER_DEG);
    multiply(mounting, mounting, turn);
    setTurn(turn, 1, rollDeg * RAD_PER_DEG);
    multiply(mounting, mounting, turn);
    conjugate(mounting, mounting);
  }
}

/** Inverse of a 3 x 3 matrix given by rows, by cofactors. */
function inverse(m: readonly number[]): Float64Array {
  const cofactor = (r: number, c: number) => {
    const [r1, r2, c1, c2] = [(r + 1) % 3, (r + 2) % 3, (c + 1) % 3, (c + 2) % 3];
    return m[3 * r1 + c1] * m[3 * r2 + c2] - m[3 * r1 + c2] * m[3 * r2 + c1];
  };
  const determinant = m[0] * cofactor(0, 0) + m[1] * cofactor(0, 1) + m[2] * cofactor(0, 2);
  return Float64Array.from({ length: 9 }, (_, i) => cofactor(i % 3, Math.floor(i / 3)) / determinant);
}

/** Replaces the vector at `at` by its product with a matrix given by rows. */
function multiplyMatrix(m: Float64Array, v: Float64Array, at: number): void {
  const x = v[at];
  const y = v[at + 1];
  const z = v[at + 2];
  for (let row = 0; row < 3; row++) v[at + row] = m[3 * row] * x + m[3 * row + 1] * y + m[3 * row + 2] * z;
}
