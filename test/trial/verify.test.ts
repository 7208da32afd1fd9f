import { appendFileSync, readFileSync, rmSync, truncateSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import fc from "fast-check";
import { describe, expect, test, vi } from "vitest";
import { emptyCounters, type PacketDecoder } from "../../bridge/link/packets.ts";
import { describeVerify, type VerifyReport, verifyTrial } from "../../bridge/trial/verify.ts";
import {
  countingBytes,
  createRecorder,
  FailingDisk,
  recordedTrial,
  START_MS,
  temporaryFolder,
} from "./fixtures.ts";

/** Counts bytes, and every zero as a packet with a wrong checksum. */
function countingDecoder(): PacketDecoder {
  const counters = emptyCounters();
  return {
    counters,
    complaint: null,
    push(chunk) {
      counters.bytes += chunk.length;
      for (const byte of chunk) if (byte === 0) counters.badChecksum++;
    },
  };
}

const verify = (folder: string): VerifyReport => verifyTrial(folder, countingDecoder);

/** A trial with a seal after each chunk of 100 bytes; `ends` are the offsets of its seals. */
async function sealedTrial(chunks: number): Promise<{ folder: string; ends: number[] }> {
  vi.useFakeTimers({ toFake: ["setInterval", "clearInterval", "Date"], now: START_MS });
  const folder = join(temporaryFolder(), "sealed");
  const recorder = await createRecorder(folder);
  const ends: number[] = [];
  for (let i = 0; i < chunks; i++) {
    recorder.bytes(countingBytes(i, 100), START_MS + 1000 * i);
    vi.setSystemTime(START_MS + 1000 * (i + 1));
    await recorder.drain();
    ends.push(recorder.state.bytes);
  }
  await recorder.close();
  ends.push(recorder.state.bytes);
  vi.useRealTimers();
  return { folder, ends };
}

const packetsOf = (folder: string): string => join(folder, "packets.cborseq");

describe("a whole trial", () => {
  test("has no problems, and its numbers are those recorded", async () => {
    const { folder } = await sealedTrial(4);
    const report = verify(folder);
    expect(report.problems).toEqual([]);
    expect(report).toMatchObject({
      records: 5,
      linkBytes: 400,
      durationS: 3,
      seals: 6,
      unsealedBytes: 0,
      packets: { bytes: 400 },
    });
    expect(report.manifest!.rig.name).toBe("Ribbon foil, bench 2");
    expect(describeVerify(report)).toMatch(/Whole: every byte is as it was recorded\.$/);
  });

  test("is whole however noisy its link was; the noise is counted", async () => {
    const folder = await recordedTrial(300, 7);
    const report = verify(folder);
    expect(report.problems).toEqual([]);
    // 2100 bytes counting from 0 modulo 256 hold nine zeros.
    expect(describeVerify(report)).toContain("9 with a wrong checksum");
  });
});

describe("a changed byte", () => {
  test("anywhere in the packets is found, with the range between two seals it lies in", async () => {
    const { folder, ends } = await sealedTrial(4);
    const good = readFileSync(packetsOf(folder));
    fc.assert(
      fc.property(fc.nat(good.length - 1), fc.integer({ min: 1, max: 255 }), (at, flip) => {
        const bad = Buffer.from(good);
        bad[at] = bad[at]! ^ flip;
        writeFileSync(packetsOf(folder), bad);
        const report = verify(folder);
        const to = ends.find((end) => end > at)!;
        const from = ends[ends.indexOf(to) - 1] ?? 0;
        expect(report.changedRanges).toEqual([{ from, to }]);
        expect(report.problems.join()).toContain(`between bytes ${from} and ${to}`);
      }),
      { seed: 180, numRuns: 200 },
    );
  });

  test("in two places is found in both", async () => {
    const { folder, ends } = await sealedTrial(4);
    const bytes = readFileSync(packetsOf(folder));
    // In the payloads of the first chunk and the third.
    bytes[ends[0]! - 1]! ^= 1;
    bytes[ends[2]! - 1]! ^= 1;
    writeFileSync(packetsOf(folder), bytes);
    expect(verify(folder).changedRanges).toEqual([
      { from: 0, to: ends[0] },
      { from: ends[1], to: ends[2] },
    ]);
  });

  test("in the manifest is found", async () => {
    const folder = await recordedTrial(3);
    const path = join(folder, "trial.json");
    writeFileSync(path, readFileSync(path, "utf8").replace("640", "650"));
    expect(verify(folder).problems).toEqual(["trial.json: changed since it was recorded"]);
  });

  test("in the seals is a problem of its own", async () => {
    const { folder } = await sealedTrial(2);
    appendFileSync(join(folder, "seals.jsonl"), '{"offset":-1}\n');
    expect(verify(folder).problems).toEqual(["seals.jsonl, line 5: not a seal"]);
  });
});

describe("missing bytes", () => {
  test("a trial cut at every byte of its last record says how much of it is there", async () => {
    const folder = await recordedTrial(3);
    const size = readFileSync(packetsOf(folder)).length;
    // The last record: array head, "end" (4), host time (9: an integer), "stopped" (8).
    const recordBytes = 1 + 4 + 9 + 8;
    for (let left = recordBytes - 1; left > 0; left--) {
      truncateSync(packetsOf(folder), size - recordBytes + left);
      const report = verify(folder);
      expect(report.end).toEqual({ kind: "truncated", offset: size - recordBytes, unreadBytes: left });
      expect(report.records).toBe(3);
      expect(report.problems).toContain(`packets.cborseq: ${recordBytes - left} bytes are gone from its end`);
    }
    truncateSync(packetsOf(folder), size - recordBytes);
    expect(verify(folder).problems).toContain("packets.cborseq: no end record; the recording was cut short");
  });

  test("a gap stated by the recorder is told", async () => {
    const disk = new FailingDisk();
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder, { openFile: disk.openFile, queueLimitBytes: 10 });
    disk.full = true;
    for (let i = 0; i < 3; i++) recorder.bytes(countingBytes(0, 100), START_MS + 1000 * i);
    await recorder.drain();
    disk.full = false;
    await recorder.close();
    const { problems } = verify(folder);
    expect(problems).toHaveLength(1);
    expect(problems[0]).toMatch(/^200 bytes of the link over 1\.0 s were not recorded: /);
  });

  test("a trial without seals or manifest is read as far as it goes", async () => {
    const folder = await recordedTrial(3);
    rmSync(join(folder, "seals.jsonl"));
    rmSync(join(folder, "trial.json"));
    const report = verify(folder);
    expect(report).toMatchObject({ manifest: null, records: 4, packets: null });
    expect(report.problems).toHaveLength(2);
    expect(describeVerify(report)).toContain("Not whole:");
  });

  test("a folder without packets is refused", () => {
    expect(() => verify(temporaryFolder())).toThrow(/TRIAL_UNREADABLE/);
  });
});
