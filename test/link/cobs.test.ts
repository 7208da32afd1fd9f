import fc from "fast-check";
import { expect, test } from "vitest";
import { CobsFramer } from "../../bridge/link/cobs.ts";
import { VERDICT } from "../../bridge/link/framing.ts";
import { runFramer } from "./frames.ts";
import { hex, join } from "./log.ts";

const run = (bytes: Uint8Array, cuts: readonly number[] = [], maxBytes = 8) =>
  runFramer((counters, onFrame) => new CobsFramer(maxBytes, counters, onFrame), bytes, cuts);

test("delimiters standing alone are neither frames nor discarded bytes", () => {
  expect(run(hex("00 00 02 aa 00 00"))).toEqual({
    frames: ["aa"],
    badChecksum: 0,
    overLong: 0,
    discardedBytes: 0,
  });
});

test("a block that the delimiter cuts off is bad, and the next frame is found", () => {
  expect(run(hex("05 11 22 00 02 aa 00"))).toEqual({
    frames: ["aa"],
    badChecksum: 1,
    overLong: 0,
    discardedBytes: 4,
  });
});

test("a frame of the longest legal length passes; one byte more is over-long", () => {
  expect(run(hex("09 11 22 33 44 55 66 77 88 00")).frames).toEqual(["1122334455667788"]);
  expect(run(hex("0a 11 22 33 44 55 66 77 88 99 00 02 aa 00"))).toEqual({
    frames: ["aa"],
    badChecksum: 0,
    overLong: 1,
    discardedBytes: 11,
  });
});

test("over-long by an implied zero alone is noticed too", () => {
  expect(run(hex("09 11 22 33 44 55 66 77 88 01 00 02 aa 00"))).toEqual({
    frames: ["aa"],
    badChecksum: 0,
    overLong: 1,
    discardedBytes: 11,
  });
});

test("a refused frame is discarded, a broken one counts as bad too", () => {
  const judged = (verdict: 1 | 2) =>
    runFramer(
      (counters, onFrame) => new CobsFramer(8, counters, onFrame),
      hex("02 aa 00"),
      [],
      () => verdict,
    );
  expect(judged(VERDICT.REFUSED)).toEqual({ frames: [], badChecksum: 0, overLong: 0, discardedBytes: 3 });
  expect(judged(VERDICT.BROKEN)).toEqual({ frames: [], badChecksum: 1, overLong: 0, discardedBytes: 3 });
});

test("whatever comes, chunking changes nothing and the frame after the next delimiter is found", () => {
  fc.assert(
    fc.property(fc.uint8Array({ maxLength: 60 }), fc.array(fc.nat(70)), (noise, cuts) => {
      const bytes = join(noise, hex("00 03 ab cd 00"));
      const whole = run(bytes);
      expect(run(bytes, cuts)).toEqual(whole);
      expect(whole.frames.at(-1)).toBe("abcd");
      for (const frame of whole.frames) expect(frame.length).toBeLessThanOrEqual(16);
    }),
  );
});
