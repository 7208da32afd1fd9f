import { decode, encode } from "cborg";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  decodeRecord,
  encodeRecord,
  itemEnd,
  MAX_CHUNK_BYTES,
  MAX_RECORD_BYTES,
  type TrialRecord,
} from "../../bridge/trial/records.ts";
import { CHECK_STEPS, type CheckAction } from "../../bridge/wire/check.ts";

const hostTimeMs = fc.oneof(
  fc.integer({ min: 0, max: 4e12 }),
  fc.double({ min: 0, max: 4e12, noNaN: true, noDefaultInfinity: true }).filter((ms) => !Object.is(ms, -0)),
);
const text = fc.string({ unit: "binary", maxLength: 60 });
const count = fc.nat(1e9);

const record: fc.Arbitrary<TrialRecord> = fc.oneof(
  fc.record({ kind: fc.constant("bytes" as const), hostTimeMs, chunk: fc.uint8Array({ maxLength: 600 }) }),
  fc.record({
    kind: fc.constant("link" as const),
    hostTimeMs,
    state: fc.constantFrom("opening", "open", "closed", "ended"),
    detail: text,
  }),
  fc.record({
    kind: fc.constant("gap" as const),
    hostTimeMs,
    gap: fc.record({ records: count, bytes: count, fromMs: hostTimeMs, toMs: hostTimeMs, reason: text }),
  }),
  fc.record({
    kind: fc.constant("choice" as const),
    hostTimeMs,
    choice: fc.record({ heading: fc.constantFrom("magnetic", "relative", "free") }),
  }),
  fc.record({
    kind: fc.constant("check" as const),
    hostTimeMs,
    check: fc.oneof<fc.Arbitrary<CheckAction>[]>(
      fc.record({ action: fc.constantFrom("begin", "end"), step: fc.constantFrom(...CHECK_STEPS) }),
      fc.record({ action: fc.constantFrom("take out", "put back"), sensor: text }),
      fc.record({ action: fc.constant("operator" as const), name: text }),
    ),
  }),
  fc.record({ kind: fc.constant("end" as const), hostTimeMs, detail: text }),
);

test("the bytes of a record are those of RFC 8949, by hand", () => {
  // 83 array of 3; 65 text of 5; 1b 8-byte integer; 42 byte string of 2.
  expect(
    Buffer.from(encodeRecord({ kind: "bytes", hostTimeMs: 2 ** 40, chunk: Uint8Array.of(1, 2) })).toString(
      "hex",
    ),
  ).toBe("83656279746573" + "1b0000010000000000" + "420102");
  expect(decode(encodeRecord({ kind: "link", hostTimeMs: 1.5, state: "open", detail: "a: b" }))).toEqual([
    "link",
    1.5,
    "open: a: b",
  ]);
});

test("every record reads back as it was, and its end is found from its first bytes on", () => {
  fc.assert(
    fc.property(record, fc.uint8Array({ maxLength: 5 }), (original, after) => {
      const bytes = encodeRecord(original);
      expect(decodeRecord(bytes)).toEqual(original);
      const followed = Uint8Array.from([...bytes, ...after]);
      expect(itemEnd(followed, 0, followed.length)).toBe(bytes.length);
      for (let known = 0; known < bytes.length; known++) expect(itemEnd(followed, 0, known)).toBe(-1);
    }),
    { seed: 8949, numRuns: 200 },
  );
});

test("the longest records stay below the limit a reader relies on", () => {
  const longText = "ä".repeat(5000);
  const records: TrialRecord[] = [
    { kind: "bytes", hostTimeMs: 0.1, chunk: new Uint8Array(MAX_CHUNK_BYTES) },
    { kind: "end", hostTimeMs: 0.1, detail: longText },
    {
      kind: "gap",
      hostTimeMs: 0.1,
      gap: { records: 1e15, bytes: 1e15, fromMs: 0.1, toMs: 0.1, reason: longText },
    },
  ];
  for (const long of records) expect(encodeRecord(long).length).toBeLessThanOrEqual(MAX_RECORD_BYTES);
});

describe("damage", () => {
  test("any bytes either are a record, or end, or go on, or are none; nothing throws", () => {
    fc.assert(
      fc.property(fc.uint8Array({ maxLength: 40 }), (bytes) => {
        const end = itemEnd(bytes, 0, bytes.length);
        expect(end === -1 || end === -2 || (end > 0 && end <= bytes.length)).toBe(true);
        expect(() => decodeRecord(bytes)).not.toThrow();
      }),
      { seed: 1, numRuns: 2000 },
    );
  });

  test.each([
    ["a break", [0xff]],
    ["an indefinite array", [0x9f]],
    ["a reserved head", [0x1c]],
    ["a tag", [0xc0, 0x00]],
    ["a string longer than any record", [0x5a, 0x7f, 0xff, 0xff, 0xff]],
    ["arrays nested too deep", [0x81, 0x81, 0x81, 0x81, 0x00]],
  ])("%s is no record", (_, bytes) => {
    expect(itemEnd(Uint8Array.from(bytes), 0, bytes.length)).toBe(-2);
  });

  test.each([
    ["another kind", ["more", 0, "x"]],
    ["a time that is text", ["end", "0", "x"]],
    ["a link state that is none", ["link", 0, "gone: x"]],
    ["two items", ["end", 0]],
    ["a gap without numbers", ["gap", 0, { reason: "x" }]],
  ])("an array with %s is no record", (_, value) => {
    expect(decodeRecord(encode(value))).toBeNull();
  });
});
