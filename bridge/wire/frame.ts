/**
 * The binary frame: what the display needs of one moment, written by the bridge at display rate, read by the dashboard.
 * Little-endian; P midline points, S sensors.
 *
 *     offset       type        what
 *     0            u16         0x4257
 *     2            u8          layout version, 1
 *     3            u8          reserved, 0
 *     4            u16         P
 *     6            u16         S
 *     8            u32         frame number (a viewer sees what it missed)
 *     12           u32         sweeps since the start
 *     16           f64         hub time, s
 *     24           f64         arrival of the newest byte on the host clock, ms since the epoch
 *     32           f32         heading of the travel axis, rad from east, anticlockwise
 *     36           f32         tailbeat phase, 0..1, NaN when not beating
 *     40           f32 x 3P    midline, m: x along the travel axis (mean nose at 0, tail negative), y left, z up
 *     40+12P       f32 x P     roll along the body, rad, right side down positive
 *     40+16P       f32 x 4S    per sensor: gyro headroom, accel headroom (0..1), field off by (share, NaN without
 *                              magnetometer), delivered over 60 s (0..1)
 *     40+16P+16S   u8 x 2S     per sensor: trust, condition bits (as in sweep.ts)
 */

export const FRAME_MAGIC = 0x4257;
export const FRAME_VERSION = 1;
export const FRAME_HEADER_BYTES = 40;

export interface DisplayFrame {
  pointCount: number;
  sensorCount: number;
  frameNumber: number;
  sweepCount: number;
  hubTimeS: number;
  hostTimeMs: number;
  travelHeading: number;
  tailbeatPhase: number;
  /** x,y,z per point. */
  midline: Float32Array;
  roll: Float32Array;
  /** Four numbers per sensor, see above. */
  sensorNumbers: Float32Array;
  /** Two bytes per sensor, see above. */
  sensorStates: Uint8Array;
}

export function createDisplayFrame(pointCount: number, sensorCount: number): DisplayFrame {
  return {
    pointCount,
    sensorCount,
    frameNumber: 0,
    sweepCount: 0,
    hubTimeS: 0,
    hostTimeMs: 0,
    travelHeading: 0,
    tailbeatPhase: Number.NaN,
    midline: new Float32Array(pointCount * 3),
    roll: new Float32Array(pointCount),
    sensorNumbers: new Float32Array(sensorCount * 4),
    sensorStates: new Uint8Array(sensorCount * 2),
  };
}

/** Bytes of a frame with P points and S sensors. */
export function frameBytes(pointCount: number, sensorCount: number): number {
  return FRAME_HEADER_BYTES + 16 * pointCount + 18 * sensorCount;
}

/** Writes `frame` into `out` (at least frameBytes long); returns the bytes written. */
export function encodeFrame(frame: DisplayFrame, out: DataView): number {
  const { pointCount, sensorCount } = frame;
  out.setUint16(0, FRAME_MAGIC, true);
  out.setUint8(2, FRAME_VERSION);
  out.setUint8(3, 0);
  out.setUint16(4, pointCount, true);
  out.setUint16(6, sensorCount, true);
  out.setUint32(8, frame.frameNumber, true);
  out.setUint32(12, frame.sweepCount, true);
  out.setFloat64(16, frame.hubTimeS, true);
  out.setFloat64(24, frame.hostTimeMs, true);
  out.setFloat32(32, frame.travelHeading, true);
  out.setFloat32(36, frame.tailbeatPhase, true);
  let at = FRAME_HEADER_BYTES;
  at = writeFloats(out, at, frame.midline);
  at = writeFloats(out, at, frame.roll);
  at = writeFloats(out, at, frame.sensorNumbers);
  for (let i = 0; i < frame.sensorStates.length; i++) out.setUint8(at++, frame.sensorStates[i]!);
  return at;
}

/**
 * Reads a frame into `into`, whose arrays are reused when the counts fit and replaced when not.
 * @returns false, leaving `into` alone, when the bytes are not a frame of this version.
 */
export function decodeFrame(bytes: DataView, into: DisplayFrame): boolean {
  if (bytes.byteLength < FRAME_HEADER_BYTES) return false;
  if (bytes.getUint16(0, true) !== FRAME_MAGIC || bytes.getUint8(2) !== FRAME_VERSION) return false;
  const pointCount = bytes.getUint16(4, true);
  const sensorCount = bytes.getUint16(6, true);
  if (bytes.byteLength !== frameBytes(pointCount, sensorCount)) return false;
  if (into.pointCount !== pointCount || into.sensorCount !== sensorCount) {
    Object.assign(into, createDisplayFrame(pointCount, sensorCount));
  }
  into.frameNumber = bytes.getUint32(8, true);
  into.sweepCount = bytes.getUint32(12, true);
  into.hubTimeS = bytes.getFloat64(16, true);
  into.hostTimeMs = bytes.getFloat64(24, true);
  into.travelHeading = bytes.getFloat32(32, true);
  into.tailbeatPhase = bytes.getFloat32(36, true);
  let at = FRAME_HEADER_BYTES;
  at = readFloats(bytes, at, into.midline);
  at = readFloats(bytes, at, into.roll);
  at = readFloats(bytes, at, into.sensorNumbers);
  for (let i = 0; i < into.sensorStates.length; i++) into.sensorStates[i] = bytes.getUint8(at++);
  return true;
}

function writeFloats(out: DataView, start: number, from: Float32Array): number {
  let at = start;
  for (let i = 0; i < from.length; i++, at += 4) out.setFloat32(at, from[i]!, true);
  return at;
}

function readFloats(bytes: DataView, start: number, into: Float32Array): number {
  let at = start;
  for (let i = 0; i < into.length; i++, at += 4) into[i] = bytes.getFloat32(at, true);
  return at;
}
