/**
 * Raw readings in sensor axes to calibrated readings in body axes (x to the nose, y left, z up).
 *
 * Gyroscope: bias off. Accelerometer: bias off, then scale. Magnetometer: hard iron off, then the soft-iron matrix. Then
 * all three are turned by the mounting rotation, which carries the body's axes onto the sensor's own: its columns are
 * the sensor's axes as seen from the body, so it takes a vector's sensor coordinates to its body coordinates.
 *
 * A quaternion fused on board is turned by the mounting too: body axes to earth.
 *
 * All of it is one affine map a part, value = M (raw - offset), worked out once; a sweep costs nine products a part.
 */

import { conjugate, multiply, normalise, setIdentity, toMatrix } from "../numeric/quaternion.ts";
import { DEG_PER_RAD, RAD_PER_DEG } from "../numeric/units.ts";
import type { SensorPlace } from "../rig/rig.ts";
import {
  ACCEL,
  CHANNELS,
  GYRO,
  HAS_ACCEL,
  HAS_GYRO,
  HAS_MAG,
  HAS_ORIENTATION,
  MAG,
  type Sweep,
} from "../sweep.ts";

type Vector3 = readonly [number, number, number];
type Matrix3 = readonly [Vector3, Vector3, Vector3];
type Mounting = SensorPlace["mounting"];

/** Slots of one map: the offset (3), then M by rows (9). */
const MAP = 12;
/** Slots of one sensor: gyroscope, accelerometer, magnetometer. */
const MAPS = 3 * MAP;

export class Calibration {
  /** sensors x MAPS. */
  readonly #maps: Float64Array;
  /** Body axes' coordinates to sensor coordinates, 4 a sensor. */
  readonly #toSensor: Float64Array;

  /** @param sensors the rig's sensors, in the order of the sweep */
  constructor(sensors: readonly SensorPlace[]) {
    this.#maps = new Float64Array(sensors.length * MAPS);
    this.#toSensor = new Float64Array(sensors.length * 4);
    sensors.forEach((sensor, i) => {
      const { gyroBiasDegPerS, accelBiasMPerS2, accelScale, magHardIronUT, magSoftIron } = sensor.calibration;
      const mounting = mountingMatrix(sensor.mounting);
      mountingQuaternion(this.#toSensor, 4 * i, sensor.mounting);
      conjugate(this.#toSensor, this.#toSensor, 4 * i, 4 * i);
      const gyroBias = gyroBiasDegPerS.map((bias) => bias * RAD_PER_DEG);
      const at = i * MAPS;
      this.#maps.set([...gyroBias, ...mounting.flat()], at);
      this.#maps.set([...accelBiasMPerS2, ...product(mounting, diagonal(accelScale)).flat()], at + MAP);
      this.#maps.set([...magHardIronUT, ...product(mounting, magSoftIron).flat()], at + 2 * MAP);
    });
  }

  /** Writes `sweep.values` from `sweep.raw`, for the parts present; the others keep their last value. */
  apply(sweep: Sweep): void {
    const { raw, values, present, sensorCount } = sweep;
    const maps = this.#maps;
    for (let sensor = 0; sensor < sensorCount; sensor++) {
      const here = present[sensor]!;
      const row = sensor * CHANNELS;
      const at = sensor * MAPS;
      if (here & HAS_GYRO) applyMap(maps, at, raw, values, row + GYRO);
      if (here & HAS_ACCEL) applyMap(maps, at + MAP, raw, values, row + ACCEL);
      if (here & HAS_MAG) applyMap(maps, at + 2 * MAP, raw, values, row + MAG);
      if (here & HAS_ORIENTATION) this.#mountOnBoard(sweep, 4 * sensor);
    }
  }

  #mountOnBoard({ onBoard, onBoardBody }: Sweep, at: number): void {
    multiply(onBoardBody, onBoard, this.#toSensor, at, at, at);
    normalise(onBoardBody, onBoardBody, at, at);
  }
}

/** out (4 slots) = the mounting rotation as a quaternion: sensor coordinates to body coordinates. */
function mountingQuaternion(out: Float64Array, outAt: number, { yawDeg, pitchDeg, rollDeg }: Mounting): void {
  const turn = new Float64Array(4);
  setIdentity(out, outAt);
  [yawDeg, pitchDeg, rollDeg].forEach((angleDeg, i) => {
    const half = 0.5 * angleDeg * RAD_PER_DEG;
    turn.fill(0);
    turn[0] = Math.cos(half);
    turn[3 - i] = Math.sin(half);
    multiply(out, out, turn, outAt, outAt);
  });
}

/**
 * The mounting rotation as a matrix by rows: sensor coordinates to body coordinates. Yaw about z, then pitch about the
 * new y, then roll about the new x, each right-handed: a positive pitch tips the sensor's x axis down.
 */
export function mountingMatrix({ yawDeg, pitchDeg, rollDeg }: Mounting): Matrix3 {
  const cy = Math.cos(yawDeg * RAD_PER_DEG);
  const sy = Math.sin(yawDeg * RAD_PER_DEG);
  const cp = Math.cos(pitchDeg * RAD_PER_DEG);
  const sp = Math.sin(pitchDeg * RAD_PER_DEG);
  const cr = Math.cos(rollDeg * RAD_PER_DEG);
  const sr = Math.sin(rollDeg * RAD_PER_DEG);
  const yaw: Matrix3 = [
    [cy, -sy, 0],
    [sy, cy, 0],
    [0, 0, 1],
  ];
  const pitch: Matrix3 = [
    [cp, 0, sp],
    [0, 1, 0],
    [-sp, 0, cp],
  ];
  const roll: Matrix3 = [
    [1, 0, 0],
    [0, cr, -sr],
    [0, sr, cr],
  ];
  return product(product(yaw, pitch), roll);
}

/** Rotation, sensor to body axes, as the rig file writes it. */
export function mountingAngles(rotation: Float64Array): {
  yawDeg: number;
  pitchDeg: number;
  rollDeg: number;
} {
  const m = new Float64Array(9);
  toMatrix(m, rotation);
  return {
    yawDeg: Math.atan2(m[3]!, m[0]!) * DEG_PER_RAD,
    pitchDeg: -Math.asin(Math.max(-1, Math.min(1, m[6]!))) * DEG_PER_RAD,
    rollDeg: Math.atan2(m[7]!, m[8]!) * DEG_PER_RAD,
  };
}

function applyMap(
  maps: Float64Array,
  at: number,
  raw: Float64Array,
  values: Float64Array,
  slot: number,
): void {
  const x = raw[slot]! - maps[at]!;
  const y = raw[slot + 1]! - maps[at + 1]!;
  const z = raw[slot + 2]! - maps[at + 2]!;
  values[slot] = maps[at + 3]! * x + maps[at + 4]! * y + maps[at + 5]! * z;
  values[slot + 1] = maps[at + 6]! * x + maps[at + 7]! * y + maps[at + 8]! * z;
  values[slot + 2] = maps[at + 9]! * x + maps[at + 10]! * y + maps[at + 11]! * z;
}

function product(a: Matrix3, b: Matrix3): Matrix3 {
  const row = (r: Vector3): Vector3 =>
    [0, 1, 2].map((c) => r[0] * b[0][c]! + r[1] * b[1][c]! + r[2] * b[2][c]!) as [number, number, number];
  return [row(a[0]), row(a[1]), row(a[2])];
}

function diagonal([x, y, z]: Vector3): Matrix3 {
  return [
    [x, 0, 0],
    [0, y, 0],
    [0, 0, z],
  ];
}
