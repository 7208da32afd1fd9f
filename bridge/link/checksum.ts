/**
 * Checksums over a range of bytes. CRCs by their catalogue parameters (Rocksoft model, Ross Williams, "A Painless Guide
 * to CRC Error Detection Algorithms", 1993), one table each, built once.
 *
 * Source of the parameters: Greg Cook, Catalogue of parametrised CRC algorithms; written from memory, held against the
 * catalogue's check values in test/standards/crc.test.ts.
 */
import type { CrcName } from "../rig/packet-layout.ts";

export interface CrcModel {
  /** Bits: 8 to 32. */
  readonly width: number;
  readonly poly: number;
  readonly init: number;
  /** Each byte enters lowest bit first. */
  readonly refin: boolean;
  /** The register is turned round before xorout. */
  readonly refout: boolean;
  readonly xorout: number;
}

export const CRC_MODELS: Readonly<Record<CrcName, CrcModel>> = {
  "CRC-8/SMBUS": crcModel(8, 0x07, 0, false, 0),
  "CRC-16/ARC": crcModel(16, 0x8005, 0, true, 0),
  "CRC-16/DNP": crcModel(16, 0x3d65, 0, true, 0xffff),
  "CRC-16/IBM-3740": crcModel(16, 0x1021, 0xffff, false, 0),
  "CRC-16/IBM-SDLC": crcModel(16, 0x1021, 0xffff, true, 0xffff),
  "CRC-16/KERMIT": crcModel(16, 0x1021, 0, true, 0),
  "CRC-16/MODBUS": crcModel(16, 0x8005, 0xffff, true, 0),
  "CRC-16/XMODEM": crcModel(16, 0x1021, 0, false, 0),
  "CRC-32/ISO-HDLC": crcModel(32, 0x04c11db7, 0xffffffff, true, 0xffffffff),
};

/** A checksum over bytes[start] up to but not including bytes[end], as an unsigned number. */
export type Checksum = (bytes: Uint8Array, start: number, end: number) => number;

/**
 * A CRC function for a model. Building it makes a table of 256 entries; calling it allocates nothing.
 *
 * The register is kept left-aligned in 32 bits (not reflected) or right-aligned (reflected), so one loop of each kind
 * serves all widths.
 */
export function crc(model: CrcModel): Checksum {
  const { width, refin, refout } = model;
  const shift = 32 - width;
  const xorout = model.xorout >>> 0;
  const turned = refin !== refout;
  const table = refin ? reflectedTable(model) : straightTable(model);
  const first = refin ? reverseBits(model.init, width) : (model.init << shift) >>> 0;
  return (bytes, start, end) => {
    let register = first;
    if (refin) {
      for (let i = start; i < end; i++) register = (register >>> 8) ^ table[(register ^ bytes[i]) & 0xff];
      register >>>= 0;
    } else {
      for (let i = start; i < end; i++) register = (register << 8) ^ table[(register >>> 24) ^ bytes[i]];
      register >>>= shift;
    }
    return ((turned ? reverseBits(register, width) : register) ^ xorout) >>> 0;
  };
}

/** CRC-16/IBM-3740, the native layout's and the text lines' checksum; check value 0x29B1. */
export const crc16Ibm3740: Checksum = crc(CRC_MODELS["CRC-16/IBM-3740"]);

/** Sum of the bytes, lowest 8 bits. */
export const sum8: Checksum = (bytes, start, end) => sum(bytes, start, end) & 0xff;

/** Sum of the bytes, lowest 16 bits. */
export const sum16: Checksum = (bytes, start, end) => sum(bytes, start, end) & 0xffff;

/** Exclusive or of the bytes. */
export const xor8: Checksum = (bytes, start, end) => {
  let value = 0;
  for (let i = start; i < end; i++) value ^= bytes[i];
  return value;
};

/** Exact up to 2^24 bytes, far above any frame. */
function sum(bytes: Uint8Array, start: number, end: number): number {
  let value = 0;
  for (let i = start; i < end; i++) value += bytes[i];
  return value;
}

function crcModel(width: number, poly: number, init: number, reflected: boolean, xorout: number): CrcModel {
  return { width, poly, init, refin: reflected, refout: reflected, xorout };
}

function straightTable({ width, poly }: CrcModel): Int32Array {
  const aligned = poly << (32 - width);
  return Int32Array.from({ length: 256 }, (_, byte) => {
    let register = byte << 24;
    for (let bit = 0; bit < 8; bit++) register = register < 0 ? (register << 1) ^ aligned : register << 1;
    return register;
  });
}

function reflectedTable({ width, poly }: CrcModel): Int32Array {
  const reversed = reverseBits(poly, width);
  return Int32Array.from({ length: 256 }, (_, byte) => {
    let register = byte;
    for (let bit = 0; bit < 8; bit++) register = register & 1 ? (register >>> 1) ^ reversed : register >>> 1;
    return register;
  });
}

function reverseBits(value: number, width: number): number {
  let reversed = 0;
  for (let bit = 0; bit < width; bit++) reversed |= ((value >>> bit) & 1) << (width - 1 - bit);
  return reversed >>> 0;
}
