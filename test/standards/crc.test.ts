/**
 * CRCs against the check values (of "123456789") in Greg Cook's Catalogue of parametrised CRC algorithms; values from
 * memory. The CRC-32 is also held against zlib's.
 */
import { crc32 } from "node:zlib";
import fc from "fast-check";
import { expect, test } from "vitest";
import { CRC_MODELS, crc, sum8, sum16, xor8 } from "../../bridge/link/checksum.ts";
import { CRC_NAMES, type CrcName } from "../../bridge/rig/packet-layout.ts";

const NINE_DIGITS = Buffer.from("123456789");

const CHECK: Readonly<Record<CrcName, number>> = {
  "CRC-8/SMBUS": 0xf4,
  "CRC-16/ARC": 0xbb3d,
  "CRC-16/DNP": 0xea82,
  "CRC-16/IBM-3740": 0x29b1,
  "CRC-16/IBM-SDLC": 0x906e,
  "CRC-16/KERMIT": 0x2189,
  "CRC-16/MODBUS": 0x4b37,
  "CRC-16/XMODEM": 0x31c3,
  "CRC-32/ISO-HDLC": 0xcbf43926,
};

test.each(CRC_NAMES)("%s gives the catalogue's check value", (name) => {
  expect(crc(CRC_MODELS[name])(NINE_DIGITS, 0, 9)).toBe(CHECK[name]);
});

test.each([
  ["CRC-8/ROHC (reflected, narrow, init not zero)", 8, 0x07, 0xff, true, true, 0x00, 0xd0],
  ["CRC-12/UMTS (in straight, out turned)", 12, 0x80f, 0, false, true, 0, 0xdaf],
  ["CRC-24/OPENPGP (straight, init)", 24, 0x864cfb, 0xb704ce, false, false, 0, 0x21cf02],
  ["CRC-32/BZIP2 (straight, full width)", 32, 0x04c11db7, 0xffffffff, false, false, 0xffffffff, 0xfc891918],
])(
  "the parameters mean what the catalogue means: %s",
  (_name, width, poly, init, refin, refout, xorout, check) => {
    expect(crc({ width, poly, init, refin, refout, xorout })(NINE_DIGITS, 0, 9)).toBe(check);
  },
);

test("a range of the bytes is covered, and nothing else", () => {
  const bytes = Buffer.from("xx123456789y");
  expect(crc(CRC_MODELS["CRC-16/IBM-3740"])(bytes, 2, 11)).toBe(0x29b1);
  expect(crc(CRC_MODELS["CRC-16/ARC"])(bytes, 2, 11)).toBe(0xbb3d);
});

test.runIf(typeof crc32 === "function")("CRC-32/ISO-HDLC agrees with zlib on any bytes", () => {
  const ours = crc(CRC_MODELS["CRC-32/ISO-HDLC"]);
  fc.assert(
    fc.property(fc.uint8Array(), (bytes) => {
      expect(ours(bytes, 0, bytes.length)).toBe(crc32(bytes));
    }),
  );
});

test("sums and exclusive or, worked by hand", () => {
  // "123456789" is 0x31 to 0x39: the sum is 477 = 0x1DD; the exclusive or of 1 to 9 is 1, and of nine 0x30 is 0x30.
  expect(sum8(NINE_DIGITS, 0, 9)).toBe(0xdd);
  expect(sum16(NINE_DIGITS, 0, 9)).toBe(0x1dd);
  expect(xor8(NINE_DIGITS, 0, 9)).toBe(0x31);
});
