import { type ChildProcess, spawn } from "node:child_process";
import { once } from "node:events";
import { existsSync, mkdirSync, readFileSync } from "node:fs";
import { join } from "node:path";
import { createInterface } from "node:readline";
import { fileURLToPath } from "node:url";
import { describe, expect, test, vi } from "vitest";
import { readManifest } from "../../bridge/trial/manifest.ts";
import { MAX_CHUNK_BYTES } from "../../bridge/trial/records.ts";
import type { Flag } from "../../bridge/wire/flag.ts";
import {
  countingBytes,
  createRecorder,
  FailingDisk,
  linkBytes,
  readAll,
  START_MS,
  temporaryFolder,
} from "./fixtures.ts";

describe("a recording", () => {
  test("holds every chunk with its arrival, the link's changes and its end, in order", async () => {
    const folder = join(temporaryFolder(), "recordings", "2026-06-01-01");
    const recorder = await createRecorder(folder, { notes: "first light" });
    recorder.linkState("open", "serial /dev/ttyACM0: opened", START_MS);
    recorder.bytes(Uint8Array.of(1, 2), START_MS + 0.25);
    recorder.bytes(Uint8Array.of(3), START_MS + 10);
    recorder.linkState("closed", "unplugged", START_MS + 20);
    await recorder.close("stopped by the operator");
    const { records, end } = readAll(folder);
    expect(records).toEqual([
      { kind: "link", hostTimeMs: START_MS, state: "open", detail: "serial /dev/ttyACM0: opened" },
      { kind: "bytes", hostTimeMs: START_MS + 0.25, chunk: Uint8Array.of(1, 2) },
      { kind: "bytes", hostTimeMs: START_MS + 10, chunk: Uint8Array.of(3) },
      { kind: "link", hostTimeMs: START_MS + 20, state: "closed", detail: "unplugged" },
      { kind: "end", hostTimeMs: START_MS + 20, detail: "stopped by the operator" },
    ]);
    expect(end.kind).toBe("complete");
    expect(readManifest(folder)).toMatchObject({ name: "2026-06-01-01", notes: "first light" });
  });

  test("copies a borrowed chunk", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    const chunk = Uint8Array.of(5);
    recorder.bytes(chunk, START_MS);
    chunk[0] = 9;
    await recorder.close();
    expect(linkBytes(readAll(folder).records)).toEqual(Buffer.from([5]));
  });

  test("splits a chunk longer than a record may hold, losing nothing", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    const chunk = countingBytes(0, 2 * MAX_CHUNK_BYTES + 3);
    recorder.bytes(chunk, START_MS);
    await recorder.close();
    const { records } = readAll(folder);
    expect(linkBytes(records).equals(chunk)).toBe(true);
    expect(records.map((record) => record.kind)).toEqual(["bytes", "bytes", "bytes", "end"]);
  });

  test("is never overwritten", async () => {
    const folder = join(temporaryFolder(), "taken");
    mkdirSync(folder);
    await expect(createRecorder(folder)).rejects.toMatchObject({ code: "TRIAL_EXISTS" });
  });

  test("that cannot start says so at once", async () => {
    await expect(createRecorder("/dev/null/trial")).rejects.toMatchObject({ code: "TRIAL_UNWRITABLE" });
  });

  test("keeps marks and flags as they come", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    const flag: Flag = {
      id: 1,
      kind: "lost samples",
      sensor: 3,
      severity: "caution",
      startS: 1.5,
      endS: null,
      detail: "12 of 100",
      advice: "Check the cable.",
    };
    recorder.mark({ timeS: 2.5, text: "flow on", from: "operator" }, START_MS + 2500);
    recorder.flag(flag);
    recorder.flag({ ...flag, endS: 4 });
    await recorder.close();
    const lines = (name: string): unknown[] =>
      readFileSync(join(folder, name), "utf8")
        .trimEnd()
        .split("\n")
        .map((line) => JSON.parse(line));
    expect(lines("marks.jsonl")).toEqual([
      { hostTimeMs: START_MS + 2500, timeS: 2.5, text: "flow on", from: "operator" },
    ]);
    expect(lines("flags.jsonl")).toEqual([flag, { ...flag, endS: 4 }]);
  });

  test("takes nothing after its end", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    await recorder.close();
    recorder.bytes(Uint8Array.of(1), START_MS);
    await recorder.close();
    expect(readAll(folder).records).toHaveLength(1);
    expect(recorder.state.state).toBe("off");
  });
});

describe("writing in time", () => {
  test("memory reaches the file within 200 ms and is sealed within a second", async () => {
    vi.useFakeTimers({ toFake: ["setInterval", "clearInterval", "Date"], now: START_MS });
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    recorder.bytes(new Uint8Array(10), START_MS);
    expect(recorder.state).toMatchObject({ state: "on", bytes: 0 });
    vi.advanceTimersByTime(200);
    await until(() => recorder.state.bytes > 10);
    expect(seals(folder)).toHaveLength(1);
    for (let i = 0; i < 4; i++) {
      vi.advanceTimersByTime(200);
      await recorder.drain();
    }
    expect(recorder.state.elapsedS).toBe(1);
    expect(seals(folder)).toHaveLength(2);
    vi.useRealTimers();
    await recorder.close();
  });

  test("a burst is written before the interval is over", async () => {
    vi.useFakeTimers({ toFake: ["setInterval", "clearInterval", "Date"], now: START_MS });
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    recorder.bytes(new Uint8Array(MAX_CHUNK_BYTES), START_MS);
    await until(() => recorder.state.bytes > MAX_CHUNK_BYTES);
    vi.useRealTimers();
    await recorder.close();
  });
});

describe("a failing disk", () => {
  test("is a state with its reason; when there is room again nothing is missing", async () => {
    const disk = new FailingDisk();
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder, { openFile: disk.openFile });
    recorder.bytes(countingBytes(0, 100), START_MS);
    await recorder.drain();
    disk.full = true;
    disk.room = 37; // The next record is cut within its payload.
    recorder.bytes(countingBytes(100, 100), START_MS + 10);
    await recorder.drain();
    expect(recorder.state).toMatchObject({ state: "failed" });
    expect(recorder.state.detail).toMatch(/^ENOSPC/);
    expect(readAll(folder).end).toMatchObject({ kind: "truncated", unreadBytes: 37 });
    recorder.bytes(countingBytes(200, 100), START_MS + 20);
    disk.full = false;
    await recorder.drain();
    expect(recorder.state).toMatchObject({ state: "on", detail: "trial" });
    await recorder.close();
    expect(linkBytes(readAll(folder).records).equals(countingBytes(0, 300))).toBe(true);
  });

  test("is tried again once a second, not at every chunk", async () => {
    vi.useFakeTimers({ toFake: ["setInterval", "clearInterval", "Date"], now: START_MS });
    const disk = new FailingDisk();
    const recorder = await createRecorder(join(temporaryFolder(), "trial"), { openFile: disk.openFile });
    disk.full = true;
    recorder.bytes(new Uint8Array(MAX_CHUNK_BYTES), START_MS);
    await until(() => recorder.state.state === "failed");
    for (let i = 0; i < 4; i++) {
      vi.advanceTimersByTime(200);
      recorder.bytes(new Uint8Array(100), START_MS);
    }
    expect(disk.failures).toBe(1);
    disk.full = false;
    vi.advanceTimersByTime(200);
    await until(() => recorder.state.state === "on");
    vi.useRealTimers();
    await recorder.close();
  });

  test("that lasts costs what does not fit the queue, and the recording states it in its place", async () => {
    const disk = new FailingDisk();
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder, { openFile: disk.openFile, queueLimitBytes: 1000 });
    disk.full = true;
    await recorder.drain();
    for (let i = 0; i < 20; i++) recorder.bytes(countingBytes(i * 100, 100), START_MS + i);
    await recorder.drain();
    expect(recorder.state.state).toBe("failed");
    const kept = 9; // 9 records of 100 bytes and their heads (119 bytes) pass 1000; the tenth finds the queue full.
    expect(recorder.state.detail).toContain(`${2000 - kept * 100} bytes of the link not recorded`);
    disk.full = false;
    await recorder.drain();
    recorder.bytes(countingBytes(0, 5), START_MS + 50);
    await recorder.close();
    const { records } = readAll(folder);
    expect(records.map((record) => record.kind)).toEqual([
      ...Array(kept).fill("bytes"),
      "gap",
      "bytes",
      "end",
    ]);
    expect(records[kept]).toMatchObject({
      gap: { records: 20 - kept, bytes: 2000 - kept * 100, fromMs: START_MS + kept, toMs: START_MS + 19 },
    });
    expect(recorder.state.detail).toContain("not recorded");
  });

  test("at the end is told by the state", async () => {
    const disk = new FailingDisk();
    const recorder = await createRecorder(join(temporaryFolder(), "trial"), { openFile: disk.openFile });
    disk.full = true;
    recorder.bytes(new Uint8Array(10), START_MS);
    await recorder.close();
    expect(recorder.state.state).toBe("failed");
  });
});

describe("a process killed while recording", () => {
  test("loses at most what the last second held, and the rest reads up to the cut", async () => {
    const folder = join(temporaryFolder(), "trial");
    const script = fileURLToPath(new URL("./record-in-child.ts", import.meta.url));
    const child = spawn(process.execPath, ["--import", "tsx", script, folder], {
      stdio: ["ignore", "pipe", "inherit"],
    });
    const sentOneSecondBefore = await killAfter(child, 1800);
    const bytes = linkBytes(readAll(folder).records);
    expect(sentOneSecondBefore).toBeGreaterThan(0);
    expect(bytes.length).toBeGreaterThanOrEqual(sentOneSecondBefore);
    expect(bytes.equals(countingBytes(0, bytes.length))).toBe(true);
    expect(existsSync(join(folder, "trial.json"))).toBe(true);
  });
});

/** Lets the disk work until something holds; the test's own time limit ends it otherwise. */
async function until(holds: () => boolean): Promise<void> {
  while (!holds()) await new Promise((resolve) => setImmediate(resolve));
}

/** Kills a recording process (SIGKILL) `ms` after its first chunk; returns what it had sent a second before that. */
async function killAfter(child: ChildProcess, ms: number): Promise<number> {
  const sent: { atMs: number; bytes: number }[] = [];
  const exit = once(child, "exit");
  for await (const line of createInterface(child.stdout!)) {
    sent.push({ atMs: performance.now(), bytes: Number(line) });
    if (sent.at(-1)!.atMs - sent[0]!.atMs >= ms) child.kill("SIGKILL");
  }
  await exit;
  const killedMs = sent.find((s) => s.atMs - sent[0]!.atMs >= ms)!.atMs;
  return sent.filter((s) => s.atMs <= killedMs - 1000).at(-1)!.bytes;
}

function seals(folder: string): string[] {
  return readFileSync(join(folder, "seals.jsonl"), "utf8").trimEnd().split("\n");
}
