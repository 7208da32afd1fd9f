/** Numbers as packets hold them: reading by type, and counters that wrap. */
import type { BinaryType } from "../rig/packet-layout.ts";

export const TYPE_BYTES: Readonly<Record<BinaryType, number>> = {
  u8: 1,
  i8: 1,
  u16: 2,
  i16: 2,
  u24: 3,
  i24: 3,
  u32: 4,
  i32: 4,
  u64: 8,
  f32: 4,
  f64: 8,
};

/** Where a number stands in a frame. */
export interface Place {
  readonly at: number;
  readonly type: BinaryType;
  readonly little: boolean;
}

/** The number at a place; u64 is exact up to 2^53. The frame must be long enough: lengths are checked before. */
export function readNumber(view: DataView, at: number, type: BinaryType, little: boolean): number {
  switch (type) {
    case "u8":
      return view.getUint8(at);
    case "i8":
      return view.getInt8(at);
    case "u16":
      return view.getUint16(at, little);
    case "i16":
      return view.getInt16(at, little);
    case "u24":
      return readU24(view, at, little);
    case "i24":
      return (readU24(view, at, little) << 8) >> 8;
    case "u32":
      return view.getUint32(at, little);
    case "i32":
      return view.getInt32(at, little);
    case "u64":
      return (
        view.getUint32(little ? at + 4 : at, little) * 2 ** 32 + view.getUint32(little ? at : at + 4, little)
      );
    case "f32":
      return view.getFloat32(at, little);
    case "f64":
      return view.getFloat64(at, little);
  }
}

function readU24(view: DataView, at: number, little: boolean): number {
  const low = little ? at : at + 2;
  const high = little ? at + 2 : at;
  return view.getUint8(low) | (view.getUint8(at + 1) << 8) | (view.getUint8(high) << 16);
}

/** Where a counter of this type starts over; 0 for never. */
export function wrapOf(type: BinaryType): number {
  const bits = /^[iu](8|16|24|32)$/.exec(type)?.[1];
  return bits === undefined ? 0 : 2 ** Number(bits);
}

/**
 * Follows a counter that wraps, taking the nearer way round: steps of less than half its size are told from wraps in
 * either direction, so a late packet is a step back and a restarted hub may look like a jump ahead.
 */
export class Unwrapper {
  readonly #size: number;
  #last = Number.NaN;
  #total = 0;

  /** @param size where the counter starts over, 0 for never */
  constructor(size: number) {
    this.#size = size;
  }

  /** The count as if the counter never wrapped; always the raw value modulo its size. */
  next(raw: number): number {
    if (this.#size === 0 || Number.isNaN(this.#last)) {
      this.#total = raw;
    } else {
      const step = raw - this.#last;
      this.#total += step - this.#size * Math.round(step / this.#size);
    }
    this.#last = raw;
    return this.#total;
  }
}

/** Value modulo size, never negative. */
export function modulo(value: number, size: number): number {
  return ((value % size) + size) % size;
}
