/** What several trial tests share: a rig, folders that vanish, a recorder with failing disk, records read back. */
import { open } from "node:fs/promises";
import { join } from "node:path";
import type { LinkState } from "../../bridge/link/source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import type { OpenAppend } from "../../bridge/trial/append-file.ts";
import { type ReadEnd, TrialReader } from "../../bridge/trial/reader.ts";
import { TrialRecorder } from "../../bridge/trial/recorder.ts";
import type { TrialRecord } from "../../bridge/trial/records.ts";
import { temporaryFolder } from "../support/folders.ts";

export { temporaryFolder };

/** An instant of an invented trial, ms since the epoch. */
export const START_MS = Date.UTC(2026, 5, 1, 9, 30);

export function createRecorder(
  folder: string,
  more: { openFile?: OpenAppend; queueLimitBytes?: number; notes?: string } = {},
): Promise<TrialRecorder> {
  return TrialRecorder.create({
    folder,
    rig: loadRig("ribbon-foil"),
    origin: { kind: "live", detail: "serial /dev/ttyACM0" },
    softwareVersion: "0.1.0",
    startedAt: new Date(START_MS),
    ...more,
  });
}

/** Records `count` chunks of `size` bytes, ten a second, whose bytes run on (0, 1, 2 ...); returns the folder. */
export async function recordedTrial(count: number, size = 7): Promise<string> {
  const folder = join(temporaryFolder(), "2026-06-01-01");
  const recorder = await createRecorder(folder);
  for (let i = 0; i < count; i++) recorder.bytes(countingBytes(i * size, size), START_MS + 100 * i);
  await recorder.close();
  return folder;
}

export function countingBytes(from: number, size: number): Uint8Array {
  return Uint8Array.from({ length: size }, (_, i) => (from + i) & 255);
}

export function readAll(folder: string): { records: TrialRecord[]; end: ReadEnd } {
  const reader = new TrialReader(folder);
  const records: TrialRecord[] = [];
  for (let record = reader.next(); record !== null; record = reader.next()) records.push(record);
  reader.close();
  return { records, end: reader.end! };
}

/** All bytes of the link in a trial, one after the other. */
export function linkBytes(records: readonly TrialRecord[]): Buffer {
  return Buffer.concat(records.map((record) => (record.kind === "bytes" ? record.chunk : new Uint8Array(0))));
}

/**
 * Files that go to the disk while `full` is false. While it is true the packets file takes `room` bytes more and then
 * fails as the kernel does (writes go to /dev/full: a real ENOSPC).
 */
export class FailingDisk {
  full = false;
  room = 0;
  failures = 0;

  readonly openFile: OpenAppend = async (path) => {
    const good = await open(path, "ax");
    if (!path.endsWith("packets.cborseq")) return good;
    const fullDevice = await open("/dev/full", "w");
    return {
      write: async (bytes) => {
        if (!this.full) return good.write(bytes);
        const part = bytes.subarray(0, this.room);
        this.room -= part.length;
        if (part.length > 0) return good.write(part);
        this.failures++;
        return fullDevice.write(bytes);
      },
      datasync: () => good.datasync(),
      close: async () => {
        await fullDevice.close();
        await good.close();
      },
    };
  };
}

/** A sink that writes down what it is given. */
export class NotingSink {
  readonly chunks: { bytes: Uint8Array; hostTimeMs: number }[] = [];
  readonly links: { state: LinkState; detail: string; hostTimeMs: number }[] = [];
  readonly marks: { text: string; hostTimeMs: number; afterChunks: number }[] = [];

  bytes(bytes: Uint8Array, hostTimeMs: number): void {
    this.chunks.push({ bytes, hostTimeMs });
  }

  linkState(state: LinkState, detail: string, hostTimeMs: number): void {
    this.links.push({ state, detail, hostTimeMs });
  }

  mark(text: string, hostTimeMs: number): void {
    this.marks.push({ text, hostTimeMs, afterChunks: this.chunks.length });
  }
}
