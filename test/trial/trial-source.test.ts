import { appendFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { afterEach, describe, expect, test, vi } from "vitest";
import { TrialSource } from "../../bridge/trial/trial-source.ts";
import {
  countingBytes,
  createRecorder,
  NotingSink,
  recordedTrial,
  START_MS,
  temporaryFolder,
} from "./fixtures.ts";

afterEach(() => {
  vi.useRealTimers();
});

describe("an unpaced replay", () => {
  test("delivers the same chunks with their recorded arrival, then the end", async () => {
    const sink = new NotingSink();
    const source = new TrialSource(await recordedTrial(5), { rate: "max", loop: false });
    await source.run(sink);
    expect(sink.chunks).toEqual(
      Array.from({ length: 5 }, (_, i) => ({
        bytes: countingBytes(7 * i, 7),
        hostTimeMs: START_MS + 100 * i,
      })),
    );
    expect(sink.links.map(({ state }) => state)).toEqual(["open", "ended"]);
    expect(source.label).toBe("trial 2026-06-01-01");
  });

  test("lets other work run while a long trial plays", async () => {
    const folder = await recordedTrial(20_000, 64);
    let turns = 0;
    const turn = (): void => {
      turns++;
      handle = setImmediate(turn);
    };
    let handle = setImmediate(turn);
    const busy = (): void => {
      for (const until = performance.now() + 0.005; performance.now() < until; );
    };
    const sink = new NotingSink();
    sink.bytes = busy;
    await new TrialSource(folder, { rate: "max", loop: false }).run(sink);
    clearImmediate(handle);
    // The sink alone takes 20 000 x 5 µs = 100 ms; with slices of 10 ms that is ten turns. Half allows for a slow clock.
    expect(turns).toBeGreaterThanOrEqual(5);
  });

  test("delivers what lies before a cut-off tail and says how much is missing", async () => {
    const folder = await recordedTrial(3);
    appendFileSync(join(folder, "packets.cborseq"), Uint8Array.of(0x83, 0x65));
    const sink = new NotingSink();
    await new TrialSource(folder, { rate: "max", loop: false }).run(sink);
    expect(sink.chunks).toHaveLength(3);
    expect(sink.links.at(-1)).toMatchObject({
      state: "ended",
      detail: expect.stringContaining("last 2 bytes"),
    });
  });

  test("delivers what lies before damage and says where that is", async () => {
    const folder = await recordedTrial(3);
    appendFileSync(join(folder, "packets.cborseq"), Uint8Array.of(0xff, 0, 0, 0));
    const sink = new NotingSink();
    await new TrialSource(folder, { rate: "max", loop: false }).run(sink);
    expect(sink.chunks).toHaveLength(3);
    expect(sink.links.at(-1)!.detail).toMatch(/damaged from byte \d+ on/);
  });

  test("passes on the recorded link's changes, but not its end", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    recorder.linkState("closed", "unplugged", START_MS);
    recorder.linkState("ended", "rehearsal over", START_MS + 1);
    await recorder.close();
    const sink = new NotingSink();
    await new TrialSource(folder, { rate: "max", loop: false }).run(sink);
    expect(sink.links.map(({ detail }) => detail)).toEqual(["trial trial", "unplugged", "end of the trial"]);
  });

  test("of a folder without packets is refused with a reason", async () => {
    const source = new TrialSource(temporaryFolder(), { rate: "max", loop: false });
    await expect(source.run(new NotingSink())).rejects.toMatchObject({ code: "TRIAL_UNREADABLE" });
  });
});

describe("marks", () => {
  test("come back at their host time, between the chunks they lay between; those of the hub's button are in the bytes", async () => {
    const folder = await recordedTrial(3);
    const line = (hostTimeMs: number, text: string, from = "operator"): string =>
      `${JSON.stringify({ hostTimeMs, timeS: 0, text, from })}\n`;
    // Out of order, and with a last line cut off by a crash.
    writeFileSync(
      join(folder, "marks.jsonl"),
      `${line(START_MS + 5000, "after all")}${line(START_MS + 150, "flow on")}${line(START_MS, "Button 1", "hub button")}{"hostTi`,
    );
    const sink = new NotingSink();
    await new TrialSource(folder, { rate: "max", loop: false }).run(sink);
    expect(sink.marks).toEqual([
      { text: "flow on", hostTimeMs: START_MS + 150, afterChunks: 2 },
      { text: "after all", hostTimeMs: START_MS + 5000, afterChunks: 3 },
    ]);
  });
});

describe("a paced replay", () => {
  test.each([
    [1, 100],
    [4, 25],
    [0.5, 200],
  ])("at rate %d waits %d ms between chunks recorded 100 ms apart", async (rate, intervalMs) => {
    const folder = await recordedTrial(4);
    vi.useFakeTimers();
    const sink = new NotingSink();
    const running = new TrialSource(folder, { rate, loop: false }).run(sink);
    await vi.advanceTimersByTimeAsync(intervalMs - 1);
    expect(sink.chunks).toHaveLength(1);
    await vi.advanceTimersByTimeAsync(1);
    expect(sink.chunks).toHaveLength(2);
    await vi.advanceTimersByTimeAsync(2 * intervalMs);
    expect(sink.chunks).toHaveLength(4);
    await running;
  });

  test("is not held up by a host clock that was set back while recording", async () => {
    const folder = join(temporaryFolder(), "trial");
    const recorder = await createRecorder(folder);
    for (const ms of [3_600_000, 3_600_100, 0, 100]) recorder.bytes(Uint8Array.of(1), START_MS + ms);
    await recorder.close();
    vi.useFakeTimers();
    const sink = new NotingSink();
    const running = new TrialSource(folder, { rate: 1, loop: false }).run(sink);
    await vi.advanceTimersByTimeAsync(199);
    expect(sink.chunks).toHaveLength(3);
    await vi.advanceTimersByTimeAsync(1);
    expect(sink.chunks).toHaveLength(4);
    await running;
  });

  test("stops while it waits, without telling of an end", async () => {
    const folder = await recordedTrial(4);
    vi.useFakeTimers();
    const sink = new NotingSink();
    const source = new TrialSource(folder, { rate: 1, loop: false });
    const running = source.run(sink);
    await vi.advanceTimersByTimeAsync(150);
    await source.stop();
    await running;
    expect(sink.chunks).toHaveLength(2);
    expect(sink.links.map(({ state }) => state)).toEqual(["open"]);
    expect(vi.getTimerCount()).toBe(0);
  });
});

describe("a looping replay", () => {
  test("starts over, announced, with host time going on by whole loops", async () => {
    const folder = await recordedTrial(3);
    const sink = new NotingSink();
    const announced: [number, number][] = [];
    const source: TrialSource = new TrialSource(folder, {
      rate: "max",
      loop: true,
      onLoop: (loop) => {
        announced.push([loop, sink.chunks.length]);
        if (loop === 2) void source.stop();
      },
    });
    await source.run(sink);
    expect(announced).toEqual([
      [1, 3],
      [2, 6],
    ]);
    // A loop lasts from the first record to the last, 200 ms, and one more.
    expect(sink.chunks.map(({ hostTimeMs }) => hostTimeMs - START_MS)).toEqual([0, 100, 200, 201, 301, 401]);
    expect(sink.links.every(({ state }) => state === "open")).toBe(true);
  });

  test("of a trial without any record ends", async () => {
    const folder = temporaryFolder();
    writeFileSync(join(folder, "packets.cborseq"), "");
    const sink = new NotingSink();
    await new TrialSource(folder, { rate: "max", loop: true }).run(sink);
    expect(sink.links.map(({ state }) => state)).toEqual(["ended"]);
  });
});
