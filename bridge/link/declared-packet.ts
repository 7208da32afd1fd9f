/** Compiles one packet of a declared layout into its readers. */
import { type BinaryType, type PacketField, type PacketLayoutKind, UNITS } from "../rig/packet-layout.ts";
import { ACCEL, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, HAS_ORIENTATION, MAG } from "../sweep.ts";
import {
  type AxisReader,
  COLUMN_BYTES,
  type CounterReader,
  GIVEN,
  type PacketReader,
  type PartReader,
  type PresenceReader,
  type ScaledReader,
  type SensorIndexReader,
  type StatusReader,
} from "./declared-readers.ts";
import { type Place, TYPE_BYTES, wrapOf } from "./numbers.ts";

/** Reports one thing that does not hold together. */
export type Report = (where: string, found: string, expected: string) => void;

/** What the compilation of each packet needs to know of the whole. */
export interface LayoutContext {
  readonly sensorCount: number;
  readonly isLine: boolean;
  /** Byte order where a field gives none. */
  readonly little: boolean;
  /** Checksum and what follows it at the end of each frame; 0 for lines, whose columns end before it. */
  readonly tailBytes: number;
  /** Longest frame; for lines, as many columns as a line of that length can hold. */
  readonly maxBytes: number;
  /** Length of all frames, where they have one. */
  readonly fixedBytes: number | null;
  /** Registers a counter that starts over at `size`; the same name and size give the same counter. */
  readonly counter: (name: string, size: number) => number;
  readonly report: Report;
}

/** A field of the given kinds. */
type Field<W extends PacketField["what"]> = Extract<PacketField, { what: W }>;
/** A field and where it stands in the layout file. */
interface Listed<F extends PacketField> {
  readonly field: F;
  readonly where: string;
}
type PartName = keyof typeof PARTS;

/** Presence bit, first channel and axes of each part of a sensor. */
const PARTS = {
  gyro: { bit: HAS_GYRO, channel: GYRO, axes: "xyz" },
  accel: { bit: HAS_ACCEL, channel: ACCEL, axes: "xyz" },
  mag: { bit: HAS_MAG, channel: MAG, axes: "xyz" },
  quaternion: { bit: HAS_ORIENTATION, channel: 0, axes: "wxyz" },
} as const;
const PART_NAMES = Object.keys(PARTS) as PartName[];

export class PacketCompiler {
  readonly #packet: PacketLayoutKind;
  readonly #where: string;
  readonly #context: LayoutContext;
  /** Where the last field ends. */
  #end = 0;

  constructor(packet: PacketLayoutKind, where: string, context: LayoutContext) {
    this.#packet = packet;
    this.#where = where;
    this.#context = context;
  }

  compile(): PacketReader {
    const readers = {
      name: this.#packet.name,
      id: this.#id(),
      gather: this.#packet.gather ?? null,
      parts: PART_NAMES.flatMap((name) => this.#parts(name)),
      statuses: this.#statuses(),
      presences: this.#presences(),
      sequence: this.#counter(this.#one("sequence")),
      tick: this.#counter(this.#one("tick")),
      sensorIndex: this.#sensorIndex(),
      supply: this.#scaled(this.#one("supply")),
      temperature: this.#scaled(this.#one("temperature")),
      referenceYaw: this.#scaled(this.#one("referenceYaw")),
      referenceSway: this.#scaled(this.#one("referenceSway")),
      syncEdge: this.#plain(this.#one("syncEdge")),
      button: this.#plain(this.#one("button")),
    };
    this.#checkGather(readers);
    return { ...readers, ...this.#lengths() };
  }

  #report(where: string, found: string, expected: string): void {
    this.#context.report(where, found, expected);
  }

  #all<W extends PacketField["what"]>(what: W): Listed<Field<W>>[] {
    return this.#packet.fields.flatMap((field, i) =>
      field.what === what ? [{ field: field as Field<W>, where: `${this.#where}.fields[${i}]` }] : [],
    );
  }

  #one<W extends PacketField["what"]>(what: W): Listed<Field<W>> | null {
    const [first, second] = this.#all(what);
    if (second !== undefined) this.#report(`${second.where}.what`, `a second "${what}"`, "one in a packet");
    return first ?? null;
  }

  /** Where a field's number stands, `shift` bytes (columns) on. */
  #place(
    field: { at: number; type?: BinaryType | undefined; endian?: string | undefined },
    where: string,
    shift = 0,
  ): Place {
    const { isLine, little } = this.#context;
    if (isLine && field.type !== undefined) {
      this.#report(`${where}.type`, `"${field.type}"`, "no type: lines hold decimal numbers");
    }
    if (!isLine && field.type === undefined) this.#report(`${where}.type`, "nothing", "a number format");
    const type = isLine ? "f64" : (field.type ?? "u8");
    const at = isLine ? (field.at + shift) * COLUMN_BYTES : field.at + shift;
    this.#end = Math.max(this.#end, at + TYPE_BYTES[type]);
    return { at, type, little: isLine || (field.endian === undefined ? little : field.endian === "little") };
  }

  #plain(listed: Listed<Field<"syncEdge" | "button">> | null): Place | null {
    return listed === null ? null : this.#place(listed.field, listed.where);
  }

  #scaled(
    listed: Listed<Field<"supply" | "temperature" | "referenceYaw" | "referenceSway">> | null,
  ): ScaledReader | null {
    if (listed === null) return null;
    const { field, where } = listed;
    const unit = unitFactor(field.what, field.unit);
    return { ...this.#place(field, where), factor: field.scale * unit, add: field.offset * unit };
  }

  #counter(listed: Listed<Field<"sequence" | "tick">> | null): CounterReader | null {
    if (listed === null) return null;
    const { field, where } = listed;
    const place = this.#place(field, where);
    const size = field.wrapsAt ?? (this.#context.isLine ? 0 : wrapOf(place.type));
    const { counter } = this.#context;
    if (field.what === "sequence") return { ...place, factor: 1, counter: counter(this.#where, size) };
    // The hub has one clock: ticks of one form are followed together, whichever packets they come in.
    const factor = field.scale * unitFactor("tick", field.unit);
    return { ...place, factor, counter: counter(`tick ${factor}`, size) };
  }

  #id(): PacketReader["id"] {
    const { id } = this.#packet;
    if (id === undefined) return null;
    const where = `${this.#where}.id`;
    if (typeof id.equals === "string" && !this.#context.isLine) {
      this.#report(`${where}.equals`, `"${id.equals}"`, "a number: only lines have texts");
    }
    return { ...this.#place(id, where), equals: id.equals };
  }

  #sensorIndex(): SensorIndexReader | null {
    const listed = this.#one("sensorIndex");
    if (listed === null) return null;
    const { field, where } = listed;
    const { sensorCount } = this.#context;
    const numbers = field.numbers ?? Array.from({ length: sensorCount }, (_, i) => i);
    if (numbers.length !== sensorCount || new Set(numbers).size !== sensorCount) {
      this.#report(
        `${where}.numbers`,
        JSON.stringify(numbers),
        `${sensorCount} different numbers, one a sensor`,
      );
    }
    return { ...this.#place(field, where), numbers };
  }

  /** Whose reading a field is, and how far on it stands: one entry, or one for each sensor of the rig. */
  #sensors({ field, where }: Listed<Field<PartName | "readStatus">>): { sensor: number; shift: number }[] {
    const { sensorCount } = this.#context;
    const { sensor, stride } = field;
    if (sensor === "each") {
      if (stride === undefined) this.#report(`${where}.stride`, "nothing", "how far sensors are apart");
      return Array.from({ length: sensorCount }, (_, i) => ({ sensor: i, shift: i * (stride ?? 0) }));
    }
    if (stride !== undefined)
      this.#report(`${where}.stride`, `${stride}`, 'none: only sensor "each" has one');
    if (sensor === "given") {
      if (this.#all("sensorIndex").length === 0) {
        this.#report(`${where}.sensor`, '"given"', "a sensorIndex field in the packet");
      }
      return [{ sensor: GIVEN, shift: 0 }];
    }
    if (sensor >= sensorCount) {
      this.#report(`${where}.sensor`, `${sensor}`, `a sensor of the rig, 0 to ${sensorCount - 1}`);
    }
    return [{ sensor, shift: 0 }];
  }

  #statuses(): StatusReader[] {
    return this.#all("readStatus").flatMap((listed) =>
      this.#sensors(listed).map(({ sensor, shift }) => ({
        ...this.#place(listed.field, listed.where, shift),
        sensor,
      })),
    );
  }

  #presences(): PresenceReader[] {
    return this.#all("presence").map(({ field, where }) => ({
      ...this.#place(field, where),
      firstSensor: field.firstSensor,
      bits: field.parts.reduce((bits, part) => bits | PARTS[part].bit, 0),
    }));
  }

  /** The readers of one part, one per sensor that has it here; its axes may come from several fields. */
  #parts(name: PartName): PartReader[] {
    const { bit, channel, axes } = PARTS[name];
    const bySensor = new Map<number, AxisReader[]>();
    let isNed = false;
    for (const listed of this.#all(name)) {
      if (listed.field.what === "quaternion") isNed ||= listed.field.frame === "ned";
      for (const { sensor, shift } of this.#sensors(listed)) {
        const readers = bySensor.get(sensor) ?? [];
        readers.push(...this.#axes(name, listed, shift));
        bySensor.set(sensor, readers);
      }
    }
    return [...bySensor].map(([sensor, readers]) => {
      const found = readers
        .map(({ slot }) => axes[slot])
        .sort()
        .join(" ");
      if (found !== [...axes].sort().join(" ")) {
        const whose = sensor === GIVEN ? "the given sensor" : `sensor ${sensor}`;
        this.#report(
          this.#where,
          `${name} of ${whose}: axes ${found}`,
          `each of ${[...axes].join(" ")} once`,
        );
      }
      return { sensor, bit, channel, axes: readers, isNed };
    });
  }

  #axes(name: PartName, { field, where }: Listed<Field<PartName>>, shift: number): AxisReader[] {
    const unit = field.what === "quaternion" ? 1 : unitFactor(field.what, field.unit);
    const offset = field.what === "quaternion" ? 0 : field.offset;
    const step = this.#context.isLine ? 1 : TYPE_BYTES[field.type ?? "u8"];
    return field.axes.map((axis, i) => {
      const sign = axis.startsWith("-") ? -unit : unit;
      return {
        ...this.#place(field, where, shift + i * step),
        slot: PARTS[name].axes.indexOf(axis.slice(-1)),
        factor: field.scale * sign,
        add: offset * sign,
        missing: field.missing ?? Number.NaN,
      };
    });
  }

  #checkGather({
    gather,
    tick,
    sequence,
    parts,
  }: Pick<PacketReader, "gather" | "tick" | "sequence" | "parts">): void {
    if (gather === null) return;
    const where = `${this.#where}.gather`;
    if ((gather === "tick" ? tick : sequence) === null) {
      this.#report(where, `"${gather}"`, `a ${gather} field in the packet`);
    }
    if (parts.length === 0) this.#report(where, `"${gather}"`, "readings of a sensor in the packet");
  }

  /** The frame lengths that fit: exact where the layout gives one, else whatever holds all fields. */
  #lengths(): { minBytes: number; maxBytes: number } {
    const { tailBytes, maxBytes, fixedBytes, isLine } = this.#context;
    const needed = this.#end + tailBytes;
    const declared = this.#packet.bytes;
    if (declared !== undefined && fixedBytes !== null && declared !== fixedBytes) {
      this.#report(`${this.#where}.bytes`, `${declared}`, `${fixedBytes}, as in framing, or nothing`);
    }
    const exact = declared === undefined ? fixedBytes : isLine ? declared * COLUMN_BYTES : declared;
    const longest = Math.min(exact ?? maxBytes, maxBytes);
    if (needed > longest) {
      const [size, unit] = isLine ? [COLUMN_BYTES, "columns"] : [1, "bytes"];
      this.#report(
        this.#where,
        `fields that need ${needed / size} ${unit}`,
        `no more than ${longest / size}`,
      );
    }
    return { minBytes: exact ?? needed, maxBytes: longest };
  }
}

function unitFactor(what: keyof typeof UNITS, unit: string): number {
  return (UNITS[what] as Readonly<Record<string, number>>)[unit];
}
