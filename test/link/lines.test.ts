import fc from "fast-check";
import { expect, test } from "vitest";
import { LineFramer } from "../../bridge/link/lines.ts";
import { runFramer } from "./frames.ts";

function run(text: string, cuts: readonly number[] = []) {
  const framed = runFramer(
    (counters, onFrame) => new LineFramer(8, counters, onFrame),
    Buffer.from(text),
    cuts,
  );
  return { ...framed, frames: framed.frames.map((frame) => Buffer.from(frame, "hex").toString()) };
}

test("LF and CR LF end a line and are not part of it; a CR inside is", () => {
  expect(run("a\nb\r\nc\rd\n").frames).toEqual(["a", "b", "c\rd"]);
});

test("empty lines are neither lines nor discarded bytes; an unended one waits", () => {
  expect(run("\n\r\nab\n\n1,2")).toEqual({ frames: ["ab"], badChecksum: 0, overLong: 0, discardedBytes: 0 });
});

test("an over-long line is counted once and the next one is found", () => {
  expect(run("12345678\n123456789...\r\nab\n")).toEqual({
    frames: ["12345678", "ab"],
    badChecksum: 0,
    overLong: 1,
    discardedBytes: 14,
  });
});

test("whatever comes, chunking changes nothing and the line after the next LF is found", () => {
  const noise = fc.string({ unit: fc.constantFrom("\r", "\n", "x", ","), maxLength: 40 });
  fc.assert(
    fc.property(noise, fc.array(fc.nat(50)), (text, cuts) => {
      const whole = run(`${text}\nabcd\r\n`);
      expect(run(`${text}\nabcd\r\n`, cuts)).toEqual(whole);
      expect(whole.frames.at(-1)).toBe("abcd");
    }),
  );
});
