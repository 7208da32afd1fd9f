/**
 * The sweep: one hub tick's readings from all sensors, the one record that every stage reads and the next one enriches.
 *
 * There is one Sweep object per run; each stage writes its part in place. It is *borrowed*: whoever wants to keep a value
 * copies it before returning.
 *
 * `raw` and `values` are flat, sensors x CHANNELS, one row a sensor:
 *
 *     0 1 2  angular rate    rad/s
 *     3 4 5  specific force  m/s²  (at rest it points up: +9.81 on the axis that looks up)
 *     6 7 8  magnetic field  µT
 */

export const CHANNELS = 9;
export const GYRO = 0;
export const ACCEL = 3;
export const MAG = 6;

/** Presence bits, per sensor: what arrived in this sweep. */
export const HAS_GYRO = 1;
export const HAS_ACCEL = 2;
export const HAS_MAG = 4;
/** A quaternion fused on board the sensor arrived (in `onBoard`). */
export const HAS_ORIENTATION = 8;
export const HAS_INERTIAL = HAS_GYRO | HAS_ACCEL;

/** Condition bits, per sensor: what is wrong with this reading. Never arrived = presence bit off, no condition needed. */
export const CONDITION = {
  /** A gyro axis is at full scale or flat-topped below it. */
  GYRO_CLIPPED: 1,
  ACCEL_CLIPPED: 2,
  MAG_CLIPPED: 4,
  /** The magnetic field here is not the Earth's. */
  MAG_DISTURBED: 8,
  /** An axis repeats one value. */
  STUCK: 16,
  /** The hub says reading this sensor failed (read status not 0). */
  READ_FAILED: 32,
  /** The sensor's reading was absent from this sweep, or whole sweeps before it were lost. */
  GAP: 64,
} as const;

/** Trust in a sensor's orientation. Names as on screen are in wire/. */
export const TRUST = {
  GOOD: 0,
  SETTLING: 1,
  /** Predicted across lost samples. */
  BRIDGED: 2,
  CLIPPED: 3,
  /** Heading runs on the gyroscope alone: no magnetometer, or it is disturbed. */
  HEADING_UNAIDED: 4,
  /** No readings for so long that the orientation means nothing. */
  LOST: 5,
  /** The sensor's own orientation, fused on board, taken as it is: not ours to judge. */
  FUSED_ON_BOARD: 6,
} as const;

export interface Sweep {
  readonly sensorCount: number;

  // Written by link/ (decoders).
  /** As sent: 16 bit, counts sweeps; -1 where the packets carry none. */
  sequence: number;
  /** As sent: hub tick in µs, 32 bit, wraps after 71.6 minutes; -1 where the packets carry none. */
  tickUs: number;
  /** Arrival of the chunk that completed the packet, host clock, ms since the epoch. Never used for computation. */
  hostTimeMs: number;
  /** Sensor axes, physical units, as the sensor gave them. Rows of absent readings keep their last value. */
  readonly raw: Float64Array;
  /** Presence bits per sensor. */
  readonly present: Uint8Array;
  /** The hub's read status per sensor, 0 = good. */
  readonly readStatus: Uint8Array;
  /** Quaternions fused on board (scalar first, sensor to earth), sensors x 4, where HAS_ORIENTATION is set. */
  readonly onBoard: Float64Array;

  // Written by clock/.
  /** Hub time of this sweep, s since the first sweep; strictly increasing. */
  timeS: number;
  /** Time since the sweep before, s; the nominal interval for the first. */
  stepS: number;
  /** Whole sweeps lost just before this one. */
  lostBefore: number;

  // Written by calibration/.
  /** Body axes (x to the nose, y left, z up), calibrated. */
  readonly values: Float64Array;

  /** On-board quaternions with the mounting taken off (body axes to earth), unit length, where HAS_ORIENTATION is set. */
  readonly onBoardBody: Float64Array;

  // Written by health/.
  /** Condition bits per sensor, cleared by link/ at the start of each sweep. */
  readonly conditions: Uint8Array;
}

/** A Sweep with all its arrays allocated, for `sensorCount` sensors. */
export function createSweep(sensorCount: number): Sweep {
  return {
    sensorCount,
    sequence: -1,
    tickUs: -1,
    hostTimeMs: 0,
    raw: new Float64Array(sensorCount * CHANNELS),
    present: new Uint8Array(sensorCount),
    readStatus: new Uint8Array(sensorCount),
    onBoard: new Float64Array(sensorCount * 4),
    timeS: 0,
    stepS: 0,
    lostBefore: 0,
    values: new Float64Array(sensorCount * CHANNELS),
    onBoardBody: new Float64Array(sensorCount * 4),
    conditions: new Uint8Array(sensorCount),
  };
}
