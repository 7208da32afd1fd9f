/**
 * The native packet layout, shared by encoder and decoder. A frame is COBS(payload + CRC) ended by 0x00; the CRC is
 * CRC-16/IBM-3740 (check value 0x29B1 for "123456789") over the payload. All numbers are little-endian. N sensors, nose to
 * tail, at most 64.
 *
 *     offset  type      what
 *     0       u8        protocol version, 1
 *     1       u8        packet kind
 *     2       u16       sequence: counts packets of this kind, wraps
 *     4       u32       hub tick, µs, wraps after 71.6 minutes
 *     8                 body, by kind
 *     end     u16       CRC
 *
 *     1 HELLO, about once a second
 *     8       u8        N
 *     9       u32       sweeps a second, mHz
 *     13      f32 x 3N  per sensor: rad/s, m/s², µT for one count; 0 where it has no such part
 *             string    per sensor: its serial number, u8 length and UTF-8
 *             string    the hub's serial number
 *
 *     2 SWEEP; M = ceil(N / 8), sensor i is bit i % 8 of byte i / 8, bits past N are 0
 *     8       u8        N
 *     9       u8 x M    which sensors' gyro and accelerometer are in this sweep
 *     9+M     u8 x M    which magnetometers are
 *     9+2M    u8 x N    read status, 0 good
 *     9+2M+N  i16 x 6   per sensor in the first mask: gyro x y z, accel x y z
 *             i16 x 3   per sensor in the second mask: mag x y z
 *
 *     3 STATUS      8 u16 supply, mV      10 i16 temperature, 0.01 °C      12 u16 faults (bits as in packets.ts)
 *     4 REFERENCE   8 f32 yaw, rad        12 f32 sway, m
 *     5 SYNC        8 u32 edge count
 *     6 BUTTON      8 u8 button
 */

export const PROTOCOL_VERSION = 1;
export const MAX_SENSORS = 64;
/** Largest count of a reading. A reading at it (or at -32768) is at full scale: the sensor may have clipped. */
export const FULL_SCALE_COUNTS = 32_767;

/** Bytes before the body. */
export const HEADER_BYTES = 8;
export const CRC_BYTES = 2;
export const INERTIAL_BYTES = 12;
export const MAG_BYTES = 6;
export const STATUS_BYTES = HEADER_BYTES + 6;
export const REFERENCE_BYTES = HEADER_BYTES + 8;
export const SYNC_BYTES = HEADER_BYTES + 4;
export const BUTTON_BYTES = HEADER_BYTES + 1;
/** Where a HELLO's scales begin. */
export const HELLO_SCALES_AT = HEADER_BYTES + 5;
export const SCALES_BYTES = 12;
/** Where a SWEEP's masks begin. */
export const SWEEP_MASKS_AT = HEADER_BYTES + 1;

/** Bytes of a presence mask for N sensors. */
export function maskBytes(sensorCount: number): number {
  return (sensorCount + 7) >> 3;
}

/** Longest payload for N sensors, CRC included: a HELLO whose serial numbers all have 255 bytes. */
export function maxPayloadBytes(sensorCount: number): number {
  return HELLO_SCALES_AT + sensorCount * (SCALES_BYTES + 256) + 256 + CRC_BYTES;
}
