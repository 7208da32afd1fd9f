import fc from "fast-check";
import { expect, test } from "vitest";
import { SlipFramer } from "../../bridge/link/slip.ts";
import { runFramer } from "./frames.ts";
import { hex, join } from "./log.ts";

const run = (bytes: Uint8Array, cuts: readonly number[] = []) =>
  runFramer((counters, onFrame) => new SlipFramer(4, counters, onFrame), bytes, cuts);

test.each([
  ["ESC before a byte that needs none", "01 db 02 03 c0 aa c0", 5],
  ["ESC before ESC", "01 db db dc c0 aa c0", 5],
  ["ESC before END", "01 db c0 aa c0", 3],
])("a wrong escape spoils its frame alone: %s", (_title, bytes, discardedBytes) => {
  expect(run(hex(bytes))).toEqual({ frames: ["aa"], badChecksum: 1, overLong: 0, discardedBytes });
});

test("a frame of the longest legal length passes; one byte more is over-long", () => {
  expect(run(hex("01 02 03 db dc c0")).frames).toEqual(["010203c0"]);
  expect(run(hex("01 02 03 04 db dd 06 c0 aa c0"))).toEqual({
    frames: ["aa"],
    badChecksum: 0,
    overLong: 1,
    discardedBytes: 8,
  });
});

test("whatever comes, chunking changes nothing and the frame after the next END is found", () => {
  const likely = fc.constantFrom(0xc0, 0xdb, 0xdc, 0xdd, 0x01);
  fc.assert(
    fc.property(fc.array(likely, { maxLength: 40 }), fc.array(fc.nat(50)), (noise, cuts) => {
      const bytes = join(Uint8Array.from(noise), hex("c0 ab cd c0"));
      const whole = run(bytes);
      expect(run(bytes, cuts)).toEqual(whole);
      expect(whole.frames.at(-1)).toBe("abcd");
      for (const frame of whole.frames) expect(frame.length).toBeLessThanOrEqual(8);
    }),
  );
});
