/** Turns a declared layout (rig/packet-layout.ts) into readers for a rig, and finds what does not hold together in it. */
import { BendwatchError, type ErrorDetail } from "../errors.ts";
import type { PacketLayout } from "../rig/packet-layout.ts";
import { CRC_MODELS, crc, sum8, sum16, xor8 } from "./checksum.ts";
import { type LayoutContext, PacketCompiler, type Report } from "./declared-packet.ts";
import {
  type ChecksumRule,
  COLUMN_BYTES,
  type CompiledLayout,
  type FramingRule,
} from "./declared-readers.ts";
import { TYPE_BYTES } from "./numbers.ts";

/** Without a sync word every place in the bytes is tried, and each costs the checksum of a whole frame. */
const MAX_BYTES_WITHOUT_SYNC = 1024;

/**
 * @param sensorCount of the rig
 * @throws BendwatchError CONFIG_INVALID listing everything that does not hold together
 */
export function compileLayout(layout: PacketLayout, sensorCount: number): CompiledLayout {
  const problems: ErrorDetail[] = [];
  const report: Report = (where, found, expected) => {
    problems.push({ where: `layout "${layout.name}", ${where}`, found, expected });
  };
  const counters: { readonly name: string; readonly size: number }[] = [];
  const checksum = checksumRule(layout);
  const framing = framingRule(layout, report);
  const isLine = framing.kind === "line";
  const maxBytes = framing.kind === "length" ? framing.rule.maxBytes : framing.maxBytes;
  const context: LayoutContext = {
    sensorCount,
    isLine,
    little: layout.endian === "little",
    tailBytes: isLine || checksum === null ? 0 : checksum.bytes + checksum.trailingBytes,
    maxBytes: isLine ? maxBytes * COLUMN_BYTES : maxBytes,
    fixedBytes: layout.framing.kind === "fixed" ? layout.framing.bytes : null,
    counter: (name, size) => {
      const known = counters.findIndex((c) => c.name === name && c.size === size);
      return known >= 0 ? known : counters.push({ name, size }) - 1;
    },
    report,
  };
  const packets = layout.packets.map((packet, i) =>
    new PacketCompiler(packet, `packets[${i}]`, context).compile(),
  );
  if (problems.length > 0) throw new BendwatchError("CONFIG_INVALID", problems);
  return { name: layout.name, framing, checksum, packets, counterSizes: counters.map((c) => c.size) };
}

function checksumRule({ checksum, endian }: PacketLayout): ChecksumRule | null {
  if (checksum.kind === "none") return null;
  const { kind, from, trailingBytes, marker } = checksum;
  const little = (checksum.endian ?? endian) === "little";
  const rest = { little, from, trailingBytes, marker };
  switch (kind) {
    case "sum8":
      return { compute: sum8, bytes: 1, ...rest };
    case "xor8":
      return { compute: xor8, bytes: 1, ...rest };
    case "sum16":
      return { compute: sum16, bytes: 2, ...rest };
    default:
      return { compute: crc(CRC_MODELS[kind]), bytes: CRC_MODELS[kind].width / 8, ...rest };
  }
}

function framingRule({ framing, checksum, endian }: PacketLayout, report: Report): FramingRule {
  if (framing.kind === "fixed") {
    const { bytes } = framing;
    const sync = bytesOf(framing.syncHex ?? "");
    if (sync.length === 0 && checksum.kind === "none") {
      report("framing", "neither syncHex nor a checksum", "one of them, to tell where frames begin");
    }
    if (sync.length === 0 && bytes > MAX_BYTES_WITHOUT_SYNC) {
      report("framing.bytes", `${bytes}`, `at most ${MAX_BYTES_WITHOUT_SYNC}, or a syncHex`);
    }
    if (sync.length > bytes) report("framing.bytes", `${bytes}`, `room for the ${sync.length} sync bytes`);
    const rule = { sync, headBytes: Math.max(1, sync.length), maxBytes: bytes, frameBytes: () => bytes };
    return { kind: "length", rule };
  }
  if (framing.kind !== "syncLength") return framing;
  const { lengthAt: at, lengthType, lengthAdds, maxBytes } = framing;
  const sync = bytesOf(framing.syncHex);
  const headBytes = Math.max(sync.length, at + TYPE_BYTES[lengthType]);
  if (at < sync.length) report("framing.lengthAt", `${at}`, `a place behind the ${sync.length} sync bytes`);
  if (headBytes > maxBytes) report("framing.lengthAt", `${at}`, `a place inside the ${maxBytes} of maxBytes`);
  const low = endian === "little" ? at : at + 1;
  const high = endian === "little" ? at + 1 : at;
  const frameBytes =
    lengthType === "u8"
      ? (buffer: Uint8Array) => buffer[at] + lengthAdds
      : (buffer: Uint8Array) => (buffer[low] | (buffer[high] << 8)) + lengthAdds;
  return { kind: "length", rule: { sync, headBytes, maxBytes, frameBytes } };
}

function bytesOf(hex: string): Uint8Array {
  return Uint8Array.from(hex.match(/../g) ?? [], (pair) => Number.parseInt(pair, 16));
}
