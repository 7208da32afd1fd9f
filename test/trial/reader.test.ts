import { mkdirSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { encodeRecord, MAX_CHUNK_BYTES, type TrialRecord } from "../../bridge/trial/records.ts";
import { countingBytes, readAll, START_MS, temporaryFolder } from "./fixtures.ts";

function folderWith(...parts: Uint8Array[]): string {
  const folder = join(temporaryFolder(), "trial");
  mkdirSync(folder);
  writeFileSync(join(folder, "packets.cborseq"), Buffer.concat(parts));
  return folder;
}

function chunkRecords(sizes: readonly number[]): TrialRecord[] {
  return sizes.map((size, i) => ({ kind: "bytes", hostTimeMs: START_MS + i, chunk: countingBytes(i, size) }));
}

test("an empty file holds no record and is complete", () => {
  expect(readAll(folderWith())).toEqual({
    records: [],
    end: { kind: "complete", offset: 0, unreadBytes: 0 },
  });
});

test("records of any size come through the window whole and in order", () => {
  fc.assert(
    fc.property(fc.array(fc.oneof(fc.nat(300), fc.nat(MAX_CHUNK_BYTES)), { maxLength: 25 }), (sizes) => {
      const records = chunkRecords(sizes);
      const read = readAll(folderWith(...records.map(encodeRecord)));
      expect(read.end.kind).toBe("complete");
      expect(read.records.length).toBe(records.length);
      const whole = records.every((record, i) =>
        Buffer.from(encodeRecord(record)).equals(encodeRecord(read.records[i]!)),
      );
      expect(whole).toBe(true);
    }),
    { seed: 8742, numRuns: 30 },
  );
});

test("a file of many windows holds what was read when the window has moved on", () => {
  const records = chunkRecords(Array(20).fill(MAX_CHUNK_BYTES));
  const { records: read } = readAll(folderWith(...records.map(encodeRecord)));
  expect(
    Buffer.from((read[0] as { chunk: Uint8Array }).chunk).equals(countingBytes(0, MAX_CHUNK_BYTES)),
  ).toBe(true);
});

describe("a tail", () => {
  const good = chunkRecords([40, 30]).map(encodeRecord);
  const goodBytes = good[0]!.length + good[1]!.length;
  const last = encodeRecord({ kind: "bytes", hostTimeMs: START_MS + 2, chunk: countingBytes(0, 20) });

  test("cut at any byte of the last record is reported, after all before it", () => {
    for (let cut = 1; cut < last.length; cut++) {
      const { records, end } = readAll(folderWith(...good, last.subarray(0, cut)));
      expect(records).toHaveLength(2);
      expect(end).toEqual({ kind: "truncated", offset: goodBytes, unreadBytes: cut });
    }
  });

  test("of damage is reported with its offset, after all before it", () => {
    const { records, end } = readAll(folderWith(...good, Uint8Array.of(0xff, 1, 2), last));
    expect(records).toHaveLength(2);
    expect(end).toEqual({ kind: "damaged", offset: goodBytes, unreadBytes: 3 + last.length });
  });

  test("of a record that claims more than any record holds is damage, not a cut", () => {
    const { end } = readAll(folderWith(...good, Uint8Array.of(0x83, 0x7a, 0x7f, 0xff, 0xff, 0xff)));
    expect(end).toMatchObject({ kind: "damaged", offset: goodBytes });
  });
});

test("a folder without packets is refused", () => {
  expect(() => readAll(temporaryFolder())).toThrow(/TRIAL_UNREADABLE/);
});
