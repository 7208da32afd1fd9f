/**
 * COBS against S. Cheshire, M. Baker, Consistent Overhead Byte Stuffing, IEEE/ACM Transactions on Networking 7(2), 1999;
 * examples from memory.
 */
import fc from "fast-check";
import { expect, test } from "vitest";
import { CobsFramer, cobsEncodedBytes, encodeCobs } from "../../bridge/link/cobs.ts";
import { runFramer } from "../link/frames.ts";
import { hex } from "../link/log.ts";

const range = (from: number, to: number) =>
  Buffer.from(Array.from({ length: to - from + 1 }, (_, i) => from + i)).toString("hex");

/** Data and code, without the delimiter. */
const EXAMPLES = [
  [
    "the paper's example, the start of an IPv4 header",
    "45 00 00 2c 4c 79 00 00 40 06 4f 37",
    "02 45 01 04 2c 4c 79 01 05 40 06 4f 37",
  ],
  ["no data", "", "01"],
  ["one zero", "00", "01 01"],
  ["two zeros", "00 00", "01 01 01"],
  ["zero inside", "11 22 00 33", "03 11 22 02 33"],
  ["no zero", "11 22 33 44", "05 11 22 33 44"],
  ["zeros at the end", "11 00 00 00", "02 11 01 01 01"],
  ["254 bytes that are not zero", range(1, 254), `ff ${range(1, 254)}`],
  ["a zero, then 254 that are not", `00 ${range(1, 254)}`, `01 ff ${range(1, 254)}`],
  ["255 bytes that are not zero", range(1, 255), `ff ${range(1, 254)} 02 ff`],
  ["254 that are not, then a zero", `${range(2, 255)} 00`, `ff ${range(2, 255)} 01 01`],
  ["253 that are not, a zero, one more", `${range(3, 255)} 00 01`, `fe ${range(3, 255)} 02 01`],
] as const;

const plain = (text: string) => text.replaceAll(" ", "");

function encode(data: Uint8Array): Uint8Array {
  const out = new Uint8Array(cobsEncodedBytes(data.length));
  return out.subarray(0, encodeCobs(data, data.length, out));
}

const decode = (bytes: Uint8Array) =>
  runFramer((counters, onFrame) => new CobsFramer(2000, counters, onFrame), bytes).frames;

test.each(EXAMPLES)("%s: encoded as in the literature", (_title, data, code) => {
  expect(Buffer.from(encode(hex(data))).toString("hex")).toBe(`${plain(code)}00`);
});

test.each(EXAMPLES)("%s: decoded", (_title, data, code) => {
  expect(decode(hex(`${code} 00`))).toEqual([plain(data)]);
});

test("a final 01 behind a full block, as the paper's phantom zero has it, changes nothing", () => {
  expect(decode(hex(`ff ${range(1, 254)} 01 00`))).toEqual([range(1, 254)]);
});

test("the code holds no zero but the last, costs at most one byte in 254 and one more, and comes back", () => {
  const dataOf = fc.uint8Array({ maxLength: 1200 });
  // Long runs without zeros are rare in plain random bytes.
  const fewZeros = dataOf.map((bytes) => bytes.map((byte, i) => (byte === 0 && i % 7 > 0 ? 1 : byte)));
  fc.assert(
    fc.property(fc.oneof(dataOf, fewZeros), (data) => {
      const code = encode(data);
      expect(code.indexOf(0)).toBe(code.length - 1);
      expect(code.length - 1).toBeLessThanOrEqual(data.length + Math.floor(data.length / 254) + 1);
      expect(decode(code)).toEqual([Buffer.from(data).toString("hex")]);
    }),
  );
});
