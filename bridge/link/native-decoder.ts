/**
 * Reads native packets (layout in native.ts). Frames with a wrong CRC are dropped whole and decoding resumes at the next
 * 0x00. A packet counts as good only when its body has exactly the length its content calls for.
 */
import {
  ACCEL,
  CHANNELS,
  CONDITION,
  createSweep,
  GYRO,
  HAS_ACCEL,
  HAS_GYRO,
  HAS_MAG,
  MAG,
  type Sweep,
} from "../sweep.ts";
import { crc16Ibm3740 } from "./checksum.ts";
import { CobsFramer } from "./cobs.ts";
import { VERDICT, type Verdict } from "./framing.ts";
import {
  BUTTON_BYTES,
  CRC_BYTES,
  HEADER_BYTES,
  INERTIAL_BYTES,
  MAG_BYTES,
  MAX_SENSORS,
  maskBytes,
  maxPayloadBytes,
  PROTOCOL_VERSION,
  REFERENCE_BYTES,
  STATUS_BYTES,
  SWEEP_MASKS_AT,
  SYNC_BYTES,
} from "./native.ts";
import { readHello } from "./native-hello.ts";
import {
  type ButtonPress,
  emptyCounters,
  type HubReference,
  type HubStatus,
  type LinkCounters,
  PACKET_KIND,
  type PacketDecoder,
  type PacketSink,
  type SyncEdge,
} from "./packets.ts";

/** Columns of the scale table: gyro, accelerometer, magnetometer. */
const PARTS = 3;

export class NativeDecoder implements PacketDecoder {
  readonly counters: LinkCounters = emptyCounters();
  complaint: string | null = null;
  readonly #sensorCount: number;
  readonly #sink: PacketSink;
  readonly #framer: CobsFramer;
  readonly #view: DataView;
  readonly #sweep: Sweep;
  /** Physical units for one count, sensors x PARTS; valid while #introduced. */
  readonly #scales: Float64Array;
  /** A HELLO that fits the rig has come, and none since that does not. */
  #introduced = false;
  #hostTimeMs = 0;
  readonly #status: HubStatus = { tickUs: 0, supplyV: 0, temperatureC: 0, faults: 0 };
  readonly #reference: HubReference = { tickUs: 0, yaw: 0, sway: 0 };
  readonly #edge: SyncEdge = { tickUs: 0, edge: 0 };
  readonly #press: ButtonPress = { tickUs: 0, button: 0 };

  /** @param sensorCount of the rig; at most 64 */
  constructor(sensorCount: number, sink: PacketSink) {
    this.#sensorCount = sensorCount;
    this.#sink = sink;
    this.#sweep = createSweep(sensorCount);
    this.#scales = new Float64Array(sensorCount * PARTS);
    // Room for any hub's HELLO, so that one with more sensors than the rig is understood well enough to say so.
    this.#framer = new CobsFramer(maxPayloadBytes(MAX_SENSORS), this.counters, (length) =>
      this.#frame(length),
    );
    this.#view = new DataView(this.#framer.buffer.buffer);
  }

  push(chunk: Uint8Array, hostTimeMs: number): void {
    this.counters.bytes += chunk.length;
    this.#hostTimeMs = hostTimeMs;
    this.#framer.push(chunk);
  }

  #frame(length: number): Verdict {
    const end = length - CRC_BYTES;
    const buffer = this.#framer.buffer;
    if (end < HEADER_BYTES || crc16Ibm3740(buffer, 0, end) !== this.#view.getUint16(end, true)) {
      return VERDICT.BROKEN;
    }
    if (buffer[0] !== PROTOCOL_VERSION) {
      return this.#refuse(
        `The hub speaks version ${buffer[0]} of the native layout; this program knows version ${PROTOCOL_VERSION}.`,
      );
    }
    const tickUs = this.#view.getUint32(4, true);
    switch (buffer[1]) {
      case PACKET_KIND.HELLO:
        return this.#hello(tickUs, end);
      case PACKET_KIND.SWEEP:
        return this.#readSweep(tickUs, end);
      default:
        return this.#rare(buffer[1], tickUs, end);
    }
  }

  #good(): Verdict {
    this.counters.good++;
    return VERDICT.GOOD;
  }

  #refuse(complaint?: string): Verdict {
    this.counters.notUnderstood++;
    if (complaint !== undefined) this.complaint = complaint;
    return VERDICT.REFUSED;
  }

  #readSweep(tickUs: number, end: number): Verdict {
    const count = this.#sensorCount;
    const buffer = this.#framer.buffer;
    if (end <= HEADER_BYTES) return this.#refuse();
    if (buffer[HEADER_BYTES] !== count) return this.#refuse(this.#countComplaint(buffer[HEADER_BYTES]));
    const masks = maskBytes(count);
    const magMaskAt = SWEEP_MASKS_AT + masks;
    const statusAt = magMaskAt + masks;
    const readingsAt = statusAt + count;
    if (end < readingsAt) return this.#refuse();
    const inertialCount = bitsSet(buffer, SWEEP_MASKS_AT, count);
    const magCount = bitsSet(buffer, magMaskAt, count);
    if (inertialCount < 0 || magCount < 0) return this.#refuse();
    if (end !== readingsAt + inertialCount * INERTIAL_BYTES + magCount * MAG_BYTES) return this.#refuse();
    if (!this.#introduced) {
      this.counters.awaitingHello++;
      return VERDICT.REFUSED;
    }
    const sweep = this.#sweep;
    sweep.sequence = this.#view.getUint16(2, true);
    sweep.tickUs = tickUs;
    sweep.hostTimeMs = this.#hostTimeMs;
    let at = readingsAt;
    for (let i = 0; i < count; i++) {
      sweep.present[i] = 0;
      sweep.readStatus[i] = buffer[statusAt + i];
      sweep.conditions[i] = buffer[statusAt + i] === 0 ? 0 : CONDITION.READ_FAILED;
      if (!bitAt(buffer, SWEEP_MASKS_AT, i)) continue;
      this.#triple(at, i, 0, GYRO, HAS_GYRO);
      this.#triple(at + INERTIAL_BYTES / 2, i, 1, ACCEL, HAS_ACCEL);
      at += INERTIAL_BYTES;
    }
    for (let i = 0; i < count; i++) {
      if (!bitAt(buffer, magMaskAt, i)) continue;
      this.#triple(at, i, 2, MAG, HAS_MAG);
      at += MAG_BYTES;
    }
    this.#sink.sweep(sweep);
    return this.#good();
  }

  /** Three counts at `at` into the sweep, unless the hub says the sensor has no such part. */
  #triple(at: number, sensor: number, part: number, channel: number, bit: number): void {
    const scale = this.#scales[sensor * PARTS + part];
    if (scale === 0) return;
    const { raw, present } = this.#sweep;
    const to = sensor * CHANNELS + channel;
    raw[to] = this.#view.getInt16(at, true) * scale;
    raw[to + 1] = this.#view.getInt16(at + 2, true) * scale;
    raw[to + 2] = this.#view.getInt16(at + 4, true) * scale;
    present[sensor] |= bit;
  }

  #hello(tickUs: number, end: number): Verdict {
    const hello = readHello(this.#framer.buffer, tickUs, end);
    if (hello === null) return this.#refuse();
    const found = hello.sensors.length;
    this.#introduced = found === this.#sensorCount;
    if (!this.#introduced) return this.#refuse(this.#countComplaint(found));
    hello.sensors.forEach((sensor, i) => {
      this.#scales[i * PARTS] = sensor.gyroScale;
      this.#scales[i * PARTS + 1] = sensor.accelScale;
      this.#scales[i * PARTS + 2] = sensor.magScale;
    });
    this.complaint = null;
    this.#sink.hello(hello);
    return this.#good();
  }

  /** The small packets; each has one length. */
  #rare(kind: number, tickUs: number, end: number): Verdict {
    const view = this.#view;
    if (kind === PACKET_KIND.STATUS && end === STATUS_BYTES) {
      this.#status.tickUs = tickUs;
      this.#status.supplyV = view.getUint16(8, true) / 1000;
      this.#status.temperatureC = view.getInt16(10, true) / 100;
      this.#status.faults = view.getUint16(12, true);
      this.#sink.status(this.#status);
    } else if (kind === PACKET_KIND.REFERENCE && end === REFERENCE_BYTES) {
      this.#reference.tickUs = tickUs;
      this.#reference.yaw = view.getFloat32(8, true);
      this.#reference.sway = view.getFloat32(12, true);
      if (!Number.isFinite(this.#reference.yaw + this.#reference.sway)) return this.#refuse();
      this.#sink.reference(this.#reference);
    } else if (kind === PACKET_KIND.SYNC && end === SYNC_BYTES) {
      this.#edge.tickUs = tickUs;
      this.#edge.edge = view.getUint32(8, true);
      this.#sink.sync(this.#edge);
    } else if (kind === PACKET_KIND.BUTTON && end === BUTTON_BYTES) {
      this.#press.tickUs = tickUs;
      this.#press.button = view.getUint8(8);
      this.#sink.button(this.#press);
    } else {
      return this.#refuse();
    }
    return this.#good();
  }

  #countComplaint(found: number): string {
    return `The hub announces ${found} sensors; the rig file has ${this.#sensorCount}. Correct the rig file, or the cabling.`;
  }
}

function bitAt(mask: Uint8Array, maskAt: number, i: number): boolean {
  return (mask[maskAt + (i >> 3)] & (1 << (i & 7))) !== 0;
}

/** How many of the first `count` bits are set; -1 when one past them is. */
function bitsSet(mask: Uint8Array, maskAt: number, count: number): number {
  let set = 0;
  for (let i = 0; i < count; i++) if (bitAt(mask, maskAt, i)) set++;
  for (let i = count; i < maskBytes(count) * 8; i++) if (bitAt(mask, maskAt, i)) return -1;
  return set;
}
