import fc from "fast-check";
import { expect, test } from "vitest";
import { VERDICT, type Verdict } from "../../bridge/link/framing.ts";
import { LengthFramer, type LengthRule } from "../../bridge/link/length-framing.ts";
import { runFramer } from "./frames.ts";
import { hex, join } from "./log.ts";

/** AA 55, then the length of the whole frame, data, and the sum of all bytes before. */
const SYNC_AND_LENGTH: LengthRule = {
  sync: hex("aa 55"),
  headBytes: 3,
  maxBytes: 12,
  frameBytes: (buffer) => buffer[2],
};
/** Four bytes, the last the sum of the others. */
const FIXED: LengthRule = { sync: hex(""), headBytes: 1, maxBytes: 4, frameBytes: () => 4 };

function sumIsRight(frame: Uint8Array): Verdict {
  const sum = frame.subarray(0, -1).reduce((a, b) => a + b, 0) & 0xff;
  return sum === frame[frame.length - 1] ? VERDICT.GOOD : VERDICT.BROKEN;
}

const run = (rule: LengthRule, bytes: Uint8Array, cuts: readonly number[] = []) =>
  runFramer((counters, onFrame) => new LengthFramer(rule, counters, onFrame), bytes, cuts, sumIsRight);

const FRAME = "aa 55 06 01 02 08";
const text = FRAME.replaceAll(" ", "");

test("frames are found by sync word and length, cut at every place", () => {
  const bytes = hex(FRAME + FRAME);
  for (let cut = 0; cut <= bytes.length; cut++) {
    expect(run(SYNC_AND_LENGTH, bytes, [cut])).toEqual({
      frames: [text, text],
      badChecksum: 0,
      overLong: 0,
      discardedBytes: 0,
    });
  }
});

test.each([
  ["noise", "01 02 03", 0, 0],
  ["half a sync word", "aa", 0, 0],
  ["a sync word's first byte twice", "aa aa", 0, 0],
  ["a sync word with a length too small", "aa 55 02", 0, 0],
  ["a sync word with a length too great", "aa 55 ff", 0, 1],
  ["a frame with a wrong sum", "aa 55 06 01 02 09", 1, 0],
  ["a cut-off frame", "aa 55 06 01", 1, 0],
  ["a false sync word whose length reaches into the frame", "aa 55 08", 1, 0],
])("%s before a frame costs only itself", (_title, before, badChecksum, overLong) => {
  const result = run(SYNC_AND_LENGTH, hex(`${before} ${FRAME} ${FRAME}`));
  expect(result).toEqual({
    frames: [text, text],
    badChecksum,
    overLong,
    discardedBytes: hex(before).length,
  });
});

test("intact but refused, a frame is stepped over whole, even when another seems to be inside it", () => {
  const outer = join(hex("aa 55 0a"), hex(FRAME), hex("00"));
  const result = runFramer(
    (counters, onFrame) => new LengthFramer(SYNC_AND_LENGTH, counters, onFrame),
    outer,
    [],
    () => VERDICT.REFUSED,
  );
  expect(result).toEqual({ frames: [], badChecksum: 0, overLong: 0, discardedBytes: 10 });
});

test("without a sync word, frames are found by checksum alone; a lost place counts as one bad frame", () => {
  const good = "01 02 03 06";
  const result = run(FIXED, hex(`ff fe ${good} ${good} 09 09 09 ${good}`));
  expect(result.frames).toEqual(["01020306", "01020306", "01020306"]);
  expect(result.badChecksum).toBe(1);
  expect(result.discardedBytes).toBe(5);
});

/** The rule applied to all bytes at once, without buffers: tries every place in turn. */
function byBruteForce(rule: LengthRule, bytes: Uint8Array): string[] {
  const frames: string[] = [];
  let at = 0;
  while (at + rule.headBytes <= bytes.length) {
    const rest = bytes.subarray(at);
    const length = rule.frameBytes(rest);
    const isStart =
      rule.sync.every((byte, i) => rest[i] === byte) && length >= rule.headBytes && length <= rule.maxBytes;
    if (isStart && at + length > bytes.length) break;
    const isGood = isStart && sumIsRight(rest.subarray(0, length)) === VERDICT.GOOD;
    if (isGood) frames.push(Buffer.from(rest.subarray(0, length)).toString("hex"));
    at += isGood ? length : 1;
  }
  return frames;
}

test.each([
  ["sync word and length", SYNC_AND_LENGTH],
  ["fixed length", FIXED],
])("any bytes in any chunks give the frames that trying every place gives: %s", (_title, rule) => {
  const likely = fc.array(fc.constantFrom(0xaa, 0x55, 0x03, 0x04, 0x06, 0x02, 0x00), { maxLength: 60 });
  const piece = fc.oneof(
    likely.map((list) => Uint8Array.from(list)),
    fc.constant(hex(FRAME)),
    fc.constant(hex("01 02 03 06")),
  );
  fc.assert(
    fc.property(fc.array(piece, { maxLength: 6 }), fc.array(fc.nat(300)), (pieces, cuts) => {
      const bytes = join(...pieces);
      const whole = run(rule, bytes);
      expect(run(rule, bytes, cuts)).toEqual(whole);
      expect(whole.frames).toEqual(byBruteForce(rule, bytes));
    }),
  );
});
