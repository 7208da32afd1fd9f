/**
 * Reads packets of a declared layout by the readers compiled from it.
 *
 * A packet may carry anything: readings of all sensors or of one, counters, housekeeping, the reference. Readings make a
 * sweep at once, or gathered: packets that agree in tick (or sequence) fill one sweep, which is passed on when a packet
 * with another value comes; so the very last sweep of a trial stays inside.
 */
import { CHANNELS, CONDITION, createSweep, HAS_ORIENTATION, type Sweep } from "../sweep.ts";
import { decimal, endOfChecked, framerOf, isRight } from "./declared-frames.ts";
import {
  COLUMN_BYTES,
  type CompiledLayout,
  type CounterReader,
  GIVEN,
  type PacketReader,
  type PartReader,
  type ScaledReader,
} from "./declared-readers.ts";
import { type Framer, VERDICT, type Verdict } from "./framing.ts";
import { modulo, type Place, readNumber, Unwrapper } from "./numbers.ts";
import {
  type ButtonPress,
  emptyCounters,
  type HubReference,
  type HubStatus,
  type LinkCounters,
  type PacketDecoder,
  type PacketSink,
  type SyncEdge,
} from "./packets.ts";

const QUATERNION = 4;

export class DeclaredDecoder implements PacketDecoder {
  readonly counters: LinkCounters = emptyCounters();
  complaint: string | null = null;
  readonly #layout: CompiledLayout;
  readonly #sink: PacketSink;
  readonly #framer: Framer;
  /** The frame's numbers: the framer's buffer, or a line's columns. */
  readonly #view: DataView;
  readonly #text: Buffer;
  /** Columns of the present line, for ids that are texts. */
  #columns: readonly string[] = [];
  readonly #sweep: Sweep;
  /** The sweep is being gathered. */
  #isOpen = false;
  /** What the packets of the open sweep agree in. */
  #key = -1;
  readonly #counters: readonly Unwrapper[];
  readonly #axes = new Float64Array(QUATERNION);
  #hostTimeMs = 0;
  readonly #status: HubStatus = { tickUs: -1, supplyV: 0, temperatureC: 0, faults: 0 };
  readonly #reference: HubReference = { tickUs: -1, yaw: 0, sway: 0 };
  readonly #edge: SyncEdge = { tickUs: -1, edge: 0 };
  readonly #press: ButtonPress = { tickUs: -1, button: 0 };
  /** Last counts seen among sensor readings; NaN before the first. */
  #lastEdge = Number.NaN;
  #lastButton = 0;

  /** @param layout compiled for `sensorCount` sensors */
  constructor(layout: CompiledLayout, sensorCount: number, sink: PacketSink) {
    this.#layout = layout;
    this.#sink = sink;
    this.#sweep = createSweep(sensorCount);
    this.#counters = layout.counterSizes.map((size) => new Unwrapper(size));
    const { framing } = layout;
    const onFrame = framing.kind === "line" ? this.#line.bind(this) : this.#frame.bind(this);
    this.#framer = framerOf(framing, this.counters, onFrame);
    const { buffer } = this.#framer.buffer;
    this.#text = Buffer.from(buffer);
    // A line of n characters has at most n + 1 columns.
    this.#view = new DataView(
      framing.kind === "line" ? new ArrayBuffer((framing.maxBytes + 1) * COLUMN_BYTES) : buffer,
    );
  }

  push(chunk: Uint8Array, hostTimeMs: number): void {
    this.counters.bytes += chunk.length;
    this.#hostTimeMs = hostTimeMs;
    this.#framer.push(chunk);
  }

  #frame(length: number): Verdict {
    const { checksum } = this.#layout;
    return checksum === null || isRight(checksum, this.#framer.buffer, this.#view, length)
      ? this.#packet(length)
      : VERDICT.BROKEN;
  }

  /** Lines are decoded to strings, and the columns to numbers by Number(), which rounds correctly. */
  #line(length: number): Verdict {
    const { checksum, framing } = this.#layout;
    const end = checksum === null ? length : endOfChecked(checksum, this.#text, length);
    if (end < 0) return VERDICT.BROKEN;
    const text = this.#text.toString("latin1", 0, end).trim();
    const separator = framing.kind === "line" && framing.separator !== " " ? framing.separator : / +/;
    this.#columns = text.split(separator);
    for (let c = 0; c < this.#columns.length; c++) {
      this.#view.setFloat64(c * COLUMN_BYTES, decimal(this.#columns[c]), true);
    }
    return this.#packet(this.#columns.length * COLUMN_BYTES);
  }

  #packet(length: number): Verdict {
    for (const packet of this.#layout.packets) {
      if (length < packet.minBytes || length > packet.maxBytes || !this.#hasId(packet)) continue;
      return this.#read(packet);
    }
    if (this.counters.good === 0) {
      this.complaint = `Frames come in, but none fits a packet of layout "${this.#layout.name}". Correct the layout file.`;
    }
    return this.#refuse();
  }

  #refuse(): Verdict {
    this.counters.notUnderstood++;
    return VERDICT.REFUSED;
  }

  #hasId({ id }: PacketReader): boolean {
    if (id === null) return true;
    if (typeof id.equals === "string") return this.#columns[id.at / COLUMN_BYTES].trim() === id.equals;
    return this.#number(id) === id.equals;
  }

  #read(packet: PacketReader): Verdict {
    const { sensorIndex, tick, sequence } = packet;
    const given = sensorIndex === null ? GIVEN : sensorIndex.numbers.indexOf(this.#number(sensorIndex));
    if (sensorIndex !== null && given < 0) return this.#refuse();
    const tickUs = this.#count(tick, 2 ** 32);
    const count = this.#count(sequence, 2 ** 16);
    const hasReadings = packet.parts.length > 0;
    this.#readRare(packet, tickUs, hasReadings);
    if (hasReadings) {
      this.#joinSweep(packet.gather, tickUs, count);
      this.#readSensors(packet, given);
      if (packet.gather === null) this.#deliver();
    }
    this.counters.good++;
    this.complaint = null;
    return VERDICT.GOOD;
  }

  /** Makes the sweep ready for this packet's readings, passing on the one before if it is complete. */
  #joinSweep(gather: PacketReader["gather"], tickUs: number, sequence: number): void {
    const key = gather === "sequence" ? sequence : tickUs;
    if (this.#isOpen && (gather === null || key !== this.#key)) this.#deliver();
    const sweep = this.#sweep;
    sweep.hostTimeMs = this.#hostTimeMs;
    if (this.#isOpen) return;
    this.#isOpen = true;
    this.#key = key;
    sweep.tickUs = tickUs;
    sweep.sequence = sequence;
    sweep.present.fill(0);
    sweep.readStatus.fill(0);
    sweep.conditions.fill(0);
  }

  #deliver(): void {
    this.#isOpen = false;
    this.#sink.sweep(this.#sweep);
  }

  #readSensors(packet: PacketReader, given: number): void {
    const { readStatus, conditions } = this.#sweep;
    for (const part of packet.parts) {
      const sensor = part.sensor === GIVEN ? given : part.sensor;
      if (this.#isAnnounced(packet, sensor, part.bit)) this.#readPart(part, sensor);
    }
    for (const reader of packet.statuses) {
      const status = this.#number(reader);
      if (status === 0) continue;
      const sensor = reader.sensor === GIVEN ? given : reader.sensor;
      // A status that no byte can hold (a wider field, an empty column) is a failure all the same.
      readStatus[sensor] = status > 0 && status < 255 ? status : 255;
      conditions[sensor] |= CONDITION.READ_FAILED;
    }
  }

  /** No presence field of the packet says that this part is absent. */
  #isAnnounced(packet: PacketReader, sensor: number, bit: number): boolean {
    for (const presence of packet.presences) {
      const place = sensor - presence.firstSensor;
      if ((presence.bits & bit) === 0 || place < 0) continue;
      if (Math.floor(this.#number(presence) / 2 ** place) % 2 !== 1) return false;
    }
    return true;
  }

  #readPart(part: PartReader, sensor: number): void {
    const values = this.#axes;
    for (const axis of part.axes) {
      const number = this.#number(axis);
      if (number === axis.missing || !Number.isFinite(number)) return;
      values[axis.slot] = number * axis.factor + axis.add;
    }
    const isQuaternion = part.bit === HAS_ORIENTATION;
    // Four zeros are no rotation: fusion on board has not begun.
    if (isQuaternion && Math.hypot(values[0], values[1], values[2], values[3]) === 0) return;
    if (part.isNed) toEastNorthUp(values);
    const to = isQuaternion ? this.#sweep.onBoard : this.#sweep.raw;
    const at = isQuaternion ? sensor * QUATERNION : sensor * CHANNELS + part.channel;
    for (let slot = 0; slot < part.axes.length; slot++) to[at + slot] = values[slot];
    this.#sweep.present[sensor] |= part.bit;
  }

  /** Housekeeping, reference, camera pulses and button, whichever the packet has. */
  #readRare(packet: PacketReader, tickUs: number, hasReadings: boolean): void {
    const { supply, temperature, referenceYaw, referenceSway, syncEdge, button } = packet;
    if (supply !== null || temperature !== null) {
      this.#status.tickUs = tickUs;
      this.#status.supplyV = this.#scaled(supply);
      this.#status.temperatureC = this.#scaled(temperature);
      this.#sink.status(this.#status);
    }
    if (referenceYaw !== null || referenceSway !== null) {
      this.#reference.tickUs = tickUs;
      this.#reference.yaw = this.#scaled(referenceYaw);
      this.#reference.sway = this.#scaled(referenceSway);
      this.#sink.reference(this.#reference);
    }
    if (syncEdge !== null) this.#readEdge(this.#number(syncEdge), tickUs, hasReadings);
    if (button !== null) this.#readButton(this.#number(button), tickUs, hasReadings);
  }

  #readEdge(edge: number, tickUs: number, hasReadings: boolean): void {
    const isPulse = !hasReadings || (edge !== this.#lastEdge && !Number.isNaN(this.#lastEdge));
    if (hasReadings) this.#lastEdge = edge;
    if (!isPulse || Number.isNaN(edge)) return;
    this.#edge.tickUs = tickUs;
    this.#edge.edge = edge;
    this.#sink.sync(this.#edge);
  }

  #readButton(button: number, tickUs: number, hasReadings: boolean): void {
    const isPress = !hasReadings || (button !== this.#lastButton && button !== 0);
    if (hasReadings) this.#lastButton = button;
    if (!isPress || Number.isNaN(button)) return;
    this.#press.tickUs = tickUs;
    this.#press.button = button;
    this.#sink.button(this.#press);
  }

  #number(place: Place): number {
    return readNumber(this.#view, place.at, place.type, place.little);
  }

  #scaled(reader: ScaledReader | null): number {
    return reader === null ? Number.NaN : this.#number(reader) * reader.factor + reader.add;
  }

  /** A counter as one of `size` would show it; -1 for none. */
  #count(reader: CounterReader | null, size: number): number {
    if (reader === null) return -1;
    const number = this.#number(reader);
    if (!Number.isFinite(number)) return -1;
    return modulo(Math.round(this.#counters[reader.counter].next(number) * reader.factor), size);
  }
}

/** From north-east-down: half a turn about the line between north and east. */
function toEastNorthUp(q: Float64Array): void {
  const [w, x, y, z] = q;
  q[0] = -Math.SQRT1_2 * (x + y);
  q[1] = Math.SQRT1_2 * (w + z);
  q[2] = Math.SQRT1_2 * (w - z);
  q[3] = Math.SQRT1_2 * (y - x);
}
