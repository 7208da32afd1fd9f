/** Declared layouts: frames and lines taken apart and checked, before their fields are read. */
import { CobsFramer } from "./cobs.ts";
import type { ChecksumRule, FramingRule } from "./declared-readers.ts";
import type { FrameHandler, Framer } from "./framing.ts";
import { LengthFramer } from "./length-framing.ts";
import { LineFramer } from "./lines.ts";
import { readNumber } from "./numbers.ts";
import type { LinkCounters } from "./packets.ts";
import { SlipFramer } from "./slip.ts";

/** The framer of a declared framing. */
export function framerOf(framing: FramingRule, counters: LinkCounters, onFrame: FrameHandler): Framer {
  switch (framing.kind) {
    case "cobs":
      return new CobsFramer(framing.maxBytes, counters, onFrame);
    case "slip":
      return new SlipFramer(framing.maxBytes, counters, onFrame);
    case "line":
      return new LineFramer(framing.maxBytes, counters, onFrame);
    case "length":
      return new LengthFramer(framing.rule, counters, onFrame);
  }
}

/** Whether the checksum at the end of a binary frame is right. */
export function isRight(rule: ChecksumRule, bytes: Uint8Array, view: DataView, length: number): boolean {
  const at = length - rule.bytes - rule.trailingBytes;
  if (at < rule.from) return false;
  const type = rule.bytes === 1 ? "u8" : rule.bytes === 2 ? "u16" : "u32";
  return rule.compute(bytes, rule.from, at) === readNumber(view, at, type, rule.little);
}

/** Where the checked part of a line ends; -1 when the checksum is missing or wrong. */
export function endOfChecked(rule: ChecksumRule, text: Buffer, length: number): number {
  const digits = 2 * rule.bytes;
  const at = length - digits - rule.marker.length;
  if (at < rule.from || text.toString("latin1", at, at + rule.marker.length) !== rule.marker) return -1;
  const right = rule.compute(text, rule.from, at).toString(16).padStart(digits, "0");
  return text.toString("latin1", length - digits, length).toLowerCase() === right ? at : -1;
}

/** A decimal number; NaN for anything else, an empty column too. */
export function decimal(column: string): number {
  return /^\s*[+-]?(\d+(\.\d*)?|\.\d+)(e[+-]?\d+)?\s*$/i.test(column) ? Number(column) : Number.NaN;
}
