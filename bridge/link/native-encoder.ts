/** Writes native packets (layout in native.ts): for rehearsal, import and tests. */
import { BendwatchError } from "../errors.ts";
import { ACCEL, CHANNELS, GYRO, HAS_INERTIAL, HAS_MAG, MAG, type Sweep } from "../sweep.ts";
import { crc16Ibm3740 } from "./checksum.ts";
import { cobsEncodedBytes, encodeCobs } from "./cobs.ts";
import {
  FULL_SCALE_COUNTS,
  HEADER_BYTES,
  MAX_SENSORS,
  maskBytes,
  maxPayloadBytes,
  PROTOCOL_VERSION,
  SWEEP_MASKS_AT,
} from "./native.ts";
import {
  type ButtonPress,
  type HubHello,
  type HubReference,
  type HubStatus,
  PACKET_KIND,
  type SyncEdge,
} from "./packets.ts";

/** One hub's packets. Each method returns the frame, borrowed: valid until the next call. */
export class NativeEncoder {
  readonly #hello: HubHello;
  readonly #payload: Uint8Array;
  readonly #view: DataView;
  readonly #frame: Uint8Array;
  /** Next sequence number, by kind. */
  readonly #sequences = new Uint16Array(PACKET_KIND.BUTTON + 1);
  readonly #utf8 = new TextEncoder();
  #at = 0;

  /**
   * @param hello what the hub is; its scales turn readings into counts
   * @throws BendwatchError MISUSE for no sensors or more than 64
   */
  constructor(hello: HubHello) {
    const sensorCount = hello.sensors.length;
    if (sensorCount < 1 || sensorCount > MAX_SENSORS) {
      throw new BendwatchError("MISUSE", {
        where: "NativeEncoder, hello.sensors",
        found: `${sensorCount} sensors`,
        expected: `1 to ${MAX_SENSORS}`,
      });
    }
    this.#hello = hello;
    this.#payload = new Uint8Array(maxPayloadBytes(sensorCount));
    this.#view = new DataView(this.#payload.buffer);
    this.#frame = new Uint8Array(cobsEncodedBytes(this.#payload.length));
  }

  /** The hub's introduction at `tickUs`. Serial numbers past 255 bytes are cut. */
  hello(tickUs: number): Uint8Array {
    const { sensors, rateHz, hubSerial } = this.#hello;
    this.#start(PACKET_KIND.HELLO, tickUs);
    this.#u8(sensors.length);
    this.#u32(Math.round(rateHz * 1000));
    for (const sensor of sensors) {
      this.#f32(sensor.gyroScale);
      this.#f32(sensor.accelScale);
      this.#f32(sensor.magScale);
    }
    for (const sensor of sensors) this.#text(sensor.serial);
    this.#text(hubSerial);
    return this.#finish();
  }

  /**
   * A sweep: tickUs, raw, present and readStatus are read. Counts are rounded and limited to full scale, as a sensor
   * does. A sensor counts as present with its gyro and accelerometer or not at all. `sweep.sequence` is not read: each
   * call counts one.
   */
  sweep(sweep: Sweep): Uint8Array {
    const { sensors } = this.#hello;
    const { raw, present } = sweep;
    const masks = maskBytes(sensors.length);
    this.#start(PACKET_KIND.SWEEP, sweep.tickUs);
    this.#u8(sensors.length);
    this.#payload.fill(0, SWEEP_MASKS_AT, SWEEP_MASKS_AT + 2 * masks);
    this.#at += 2 * masks;
    for (let i = 0; i < sensors.length; i++) this.#u8(sweep.readStatus[i]);
    for (let i = 0; i < sensors.length; i++) {
      if ((present[i] & HAS_INERTIAL) !== HAS_INERTIAL) continue;
      this.#payload[SWEEP_MASKS_AT + (i >> 3)] |= 1 << (i & 7);
      this.#counts(raw, i * CHANNELS + GYRO, sensors[i].gyroScale);
      this.#counts(raw, i * CHANNELS + ACCEL, sensors[i].accelScale);
    }
    for (let i = 0; i < sensors.length; i++) {
      if ((present[i] & HAS_MAG) === 0) continue;
      this.#payload[SWEEP_MASKS_AT + masks + (i >> 3)] |= 1 << (i & 7);
      this.#counts(raw, i * CHANNELS + MAG, sensors[i].magScale);
    }
    return this.#finish();
  }

  status(status: HubStatus): Uint8Array {
    this.#start(PACKET_KIND.STATUS, status.tickUs);
    this.#u16(Math.round(status.supplyV * 1000));
    this.#i16(Math.round(status.temperatureC * 100));
    this.#u16(status.faults);
    return this.#finish();
  }

  reference(reference: HubReference): Uint8Array {
    this.#start(PACKET_KIND.REFERENCE, reference.tickUs);
    this.#f32(reference.yaw);
    this.#f32(reference.sway);
    return this.#finish();
  }

  sync(edge: SyncEdge): Uint8Array {
    this.#start(PACKET_KIND.SYNC, edge.tickUs);
    this.#u32(edge.edge);
    return this.#finish();
  }

  button(press: ButtonPress): Uint8Array {
    this.#start(PACKET_KIND.BUTTON, press.tickUs);
    this.#u8(press.button);
    return this.#finish();
  }

  #start(kind: number, tickUs: number): void {
    const view = this.#view;
    view.setUint8(0, PROTOCOL_VERSION);
    view.setUint8(1, kind);
    view.setUint16(2, this.#sequences[kind]++, true);
    view.setUint32(4, tickUs, true);
    this.#at = HEADER_BYTES;
  }

  #finish(): Uint8Array {
    this.#u16(crc16Ibm3740(this.#payload, 0, this.#at));
    return this.#frame.subarray(0, encodeCobs(this.#payload, this.#at, this.#frame));
  }

  #counts(raw: Float64Array, at: number, scale: number): void {
    // The decoder knows the scale as the f32 of the HELLO.
    const sent = Math.fround(scale);
    for (let axis = 0; axis < 3; axis++) {
      const counts = sent > 0 ? Math.round(raw[at + axis] / sent) : 0;
      this.#i16(Math.max(-FULL_SCALE_COUNTS - 1, Math.min(FULL_SCALE_COUNTS, counts)));
    }
  }

  #text(text: string): void {
    const { written } = this.#utf8.encodeInto(text, this.#payload.subarray(this.#at + 1, this.#at + 256));
    this.#u8(written);
    this.#at += written;
  }

  #u8(value: number): void {
    this.#payload[this.#at++] = value;
  }

  #u16(value: number): void {
    this.#view.setUint16(this.#at, value, true);
    this.#at += 2;
  }

  #i16(value: number): void {
    this.#view.setInt16(this.#at, value, true);
    this.#at += 2;
  }

  #u32(value: number): void {
    this.#view.setUint32(this.#at, value, true);
    this.#at += 4;
  }

  #f32(value: number): void {
    this.#view.setFloat32(this.#at, value, true);
    this.#at += 4;
  }
}
