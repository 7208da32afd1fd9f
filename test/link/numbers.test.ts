import fc from "fast-check";
import { expect, test } from "vitest";
import { modulo, readNumber, TYPE_BYTES, Unwrapper, wrapOf } from "../../bridge/link/numbers.ts";
import type { BinaryType } from "../../bridge/rig/packet-layout.ts";
import { hex } from "./log.ts";

test.each<[BinaryType, string, number]>([
  ["u8", "fe", 254],
  ["i8", "fe", -2],
  ["u16", "ff fe", 65_534],
  ["i16", "ff fe", -2],
  ["u24", "ff ff fe", 16_777_214],
  ["i24", "ff ff fe", -2],
  ["i24", "7f ff ff", 8_388_607],
  ["i24", "80 00 00", -8_388_608],
  ["u32", "ff ff ff fe", 4_294_967_294],
  ["i32", "ff ff ff fe", -2],
  ["u64", "00 00 00 02 00 00 00 03", 8_589_934_595],
  ["f32", "3f c0 00 00", 1.5],
  ["f64", "bf f8 00 00 00 00 00 00", -1.5],
])("%s %s, most significant byte first and last", (type, text, value) => {
  const big = hex(`00 ${text}`);
  expect(big.length - 1).toBe(TYPE_BYTES[type]);
  expect(readNumber(new DataView(big.buffer), 1, type, false)).toBe(value);
  const little = big.slice(1).reverse();
  expect(readNumber(new DataView(little.buffer), 0, type, true)).toBe(value);
});

test("whole numbers up to 32 bits wrap at their size; others never do", () => {
  expect((["u8", "i16", "u24", "u32", "u64", "f32", "f64"] as const).map(wrapOf)).toEqual([
    256,
    65_536,
    2 ** 24,
    2 ** 32,
    0,
    0,
    0,
  ]);
});

test("a wrapping counter is followed through any steps of less than half its size, forward and back", () => {
  const steps = fc.array(fc.integer({ min: -127, max: 127 }), { maxLength: 100 });
  fc.assert(
    fc.property(fc.nat(255), steps, (start, list) => {
      const unwrapper = new Unwrapper(256);
      let count = start;
      expect(unwrapper.next(count)).toBe(count);
      for (const step of list) {
        count += step;
        expect(unwrapper.next(modulo(count, 256))).toBe(count);
      }
    }),
  );
});

test("a counter that never wraps is passed through", () => {
  const unwrapper = new Unwrapper(0);
  expect([5, 1e12, 3].map((raw) => unwrapper.next(raw))).toEqual([5, 1e12, 3]);
});
