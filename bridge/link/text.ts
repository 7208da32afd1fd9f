/**
 * Text lines, for quick bench hubs and for imported tables: one line a sweep, ended by LF or CR LF.
 *
 *     sequence,tick_us, then per sensor, nose to tail: gyro x,y,z (rad/s), accel x,y,z (m/s²), mag x,y,z (µT)
 *     ... *XXXX    optional: CRC-16/IBM-3740 of all before the asterisk, hexadecimal
 *     # ...        a comment
 *
 * Sensors whose model has no magnetometer have six columns. Decimal point; exponents allowed. Three empty columns: that
 * part is absent from this sweep. Empty sequence or tick: the hub sends none.
 */
import type { SensorModel } from "../rig/sensor-model.ts";
import {
  ACCEL,
  CHANNELS,
  createSweep,
  GYRO,
  HAS_ACCEL,
  HAS_GYRO,
  HAS_MAG,
  MAG,
  type Sweep,
} from "../sweep.ts";
import { crc16Ibm3740 } from "./checksum.ts";
import { VERDICT, type Verdict } from "./framing.ts";
import { LineFramer } from "./lines.ts";
import { emptyCounters, type LinkCounters, type PacketDecoder, type PacketSink } from "./packets.ts";

/** Which of a line's sensors have a magnetometer. */
type Models = readonly Pick<SensorModel, "mag">[];

/** Longest number in full precision is 24 characters; the rest is comma, padding and checksum. */
const CELL_BYTES = 32;
/** Longest comment for sure. */
const COMMENT_BYTES = 1024;
const ASTERISK = 0x2a;
const HASH = 0x23;
/** "*XXXX" */
const CHECKSUM_CHARACTERS = 5;
const LEADING_CELLS = 2;

/** Bytes a line of numbers may hold: digits + - . e E comma blank tab. Keeps Number() from reading hex and words. */
const IN_NUMBERS = new Uint8Array(256);
for (const character of "0123456789+-.eE, \t") IN_NUMBERS[character.charCodeAt(0)] = 1;

/** One part of a sensor: three columns. */
interface Part {
  readonly cell: number;
  readonly to: number;
  readonly sensor: number;
  readonly bit: number;
}

export class TextLineDecoder implements PacketDecoder {
  readonly counters: LinkCounters = emptyCounters();
  complaint: string | null = null;
  readonly #sink: PacketSink;
  readonly #framer: LineFramer;
  readonly #text: Buffer;
  readonly #sweep: Sweep;
  readonly #parts: readonly Part[];
  readonly #cells: Float64Array;
  #hostTimeMs = 0;

  /** @param models one per sensor, nose to tail */
  constructor(models: Models, sink: PacketSink) {
    this.#sink = sink;
    this.#sweep = createSweep(models.length);
    this.#parts = partsOf(models);
    this.#cells = new Float64Array(LEADING_CELLS + 3 * this.#parts.length);
    const maxBytes = COMMENT_BYTES + this.#cells.length * CELL_BYTES;
    this.#framer = new LineFramer(maxBytes, this.counters, (length) => this.#line(length));
    this.#text = Buffer.from(this.#framer.buffer.buffer);
  }

  push(chunk: Uint8Array, hostTimeMs: number): void {
    this.counters.bytes += chunk.length;
    this.#hostTimeMs = hostTimeMs;
    this.#framer.push(chunk);
  }

  #line(length: number): Verdict {
    if (this.#text[0] === HASH) return VERDICT.GOOD;
    let end = length;
    if (length >= CHECKSUM_CHARACTERS && this.#text[length - CHECKSUM_CHARACTERS] === ASTERISK) {
      end = length - CHECKSUM_CHARACTERS;
      const sent = this.#text.toString("latin1", end + 1, length);
      const right = crc16Ibm3740(this.#text, 0, end).toString(16).padStart(4, "0");
      if (sent.toLowerCase() !== right) return VERDICT.BROKEN;
    }
    const count = this.#readCells(end);
    if (count < 0) return this.#refuse();
    if (count !== this.#cells.length) {
      return this.#refuse(
        `The lines have ${count} columns; the rig's sensors need ${this.#cells.length}. Correct the rig file, or the hub.`,
      );
    }
    const sweep = this.#sweep;
    sweep.sequence = wrapped(this.#cells[0], 2 ** 16);
    sweep.tickUs = wrapped(this.#cells[1], 2 ** 32);
    sweep.hostTimeMs = this.#hostTimeMs;
    if (!this.#readParts()) return this.#refuse();
    this.complaint = null;
    this.counters.good++;
    this.#sink.sweep(sweep);
    return VERDICT.GOOD;
  }

  #refuse(complaint?: string): Verdict {
    this.counters.notUnderstood++;
    if (complaint !== undefined) this.complaint = complaint;
    return VERDICT.REFUSED;
  }

  /**
   * Numbers of the line into #cells, NaN for empty ones. Text is decoded to a string once a line: reading decimals
   * exactly is left to Number(), which rounds correctly, and at text rates the garbage does not matter.
   * @returns how many columns there are, -1 when one of them is no number
   */
  #readCells(end: number): number {
    for (let i = 0; i < end; i++) if (IN_NUMBERS[this.#text[i]] === 0) return -1;
    const columns = this.#text.toString("latin1", 0, end).split(",");
    for (let i = 0; i < columns.length && i < this.#cells.length; i++) {
      const column = columns[i].trim();
      const value = Number(column);
      if (!Number.isFinite(value)) return -1;
      this.#cells[i] = column === "" ? Number.NaN : value;
    }
    return this.#cells[0] < 0 || this.#cells[1] < 0 ? -1 : columns.length;
  }

  /** #cells into the sweep; false when a part has some of its three columns only. */
  #readParts(): boolean {
    const { raw, present } = this.#sweep;
    const cells = this.#cells;
    for (const { cell } of this.#parts) {
      const empty =
        +Number.isNaN(cells[cell]) + +Number.isNaN(cells[cell + 1]) + +Number.isNaN(cells[cell + 2]);
      if (empty === 1 || empty === 2) return false;
    }
    present.fill(0);
    this.#sweep.conditions.fill(0);
    for (const { cell, to, sensor, bit } of this.#parts) {
      if (Number.isNaN(cells[cell])) continue;
      for (let axis = 0; axis < 3; axis++) raw[to + axis] = cells[cell + axis];
      present[sensor] |= bit;
    }
    return true;
  }
}

/**
 * A sweep as one line with checksum and LF, in full precision: decoding gives back the very same numbers. `sequence`,
 * `tickUs`, `raw` and `present` are read.
 */
export function encodeTextLine(sweep: Sweep, models: Models): string {
  const cells = [sweep.sequence, sweep.tickUs].map((value) => (value < 0 ? "" : `${value}`));
  for (const { to, sensor, bit } of partsOf(models)) {
    const isPresent = (sweep.present[sensor] & bit) !== 0;
    for (let axis = 0; axis < 3; axis++) cells.push(isPresent ? exact(sweep.raw[to + axis]) : "");
  }
  const line = cells.join(",");
  const sum = crc16Ibm3740(Buffer.from(line, "latin1"), 0, line.length);
  return `${line}*${sum.toString(16).toUpperCase().padStart(4, "0")}\n`;
}

function partsOf(models: Models): Part[] {
  const parts: Part[] = [];
  models.forEach((model, sensor) => {
    const add = (channel: number, bit: number) =>
      parts.push({ cell: LEADING_CELLS + 3 * parts.length, to: sensor * CHANNELS + channel, sensor, bit });
    add(GYRO, HAS_GYRO);
    add(ACCEL, HAS_ACCEL);
    if (model.mag !== undefined) add(MAG, HAS_MAG);
  });
  return parts;
}

/** Shortest text that Number() reads back as the same value. */
function exact(value: number): string {
  return Object.is(value, -0) ? "-0" : `${value}`;
}

/** A count as a counter of the given size would show it; -1 for none. */
function wrapped(value: number, size: number): number {
  return Number.isNaN(value) ? -1 : Math.round(value) % size;
}
