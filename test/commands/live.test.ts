/** bendwatch live, as an operator runs it, on a real pseudo-terminal. */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { expect, onTestFinished, test } from "vitest";
import { NativeDecoder } from "../../bridge/link/native-decoder.ts";
import { encodeTextLine } from "../../bridge/link/text.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig, type Rig } from "../../bridge/rig/load.ts";
import { TrialReader } from "../../bridge/trial/reader.ts";
import type { Choice } from "../../bridge/wire/messages.ts";
import { bendwatch, startBridge, viewStream } from "../support/bridge-process.ts";
import { temporaryFolder, writeRig } from "../support/folders.ts";
import { openPty, type Pty } from "../support/pty.ts";

/** Plays a rehearsed hub onto the terminal in real time, for as long as the test runs. What it wrote is kept. */
function playHub(pty: Pty, rig: Rig, encode: (bytes: Uint8Array) => Uint8Array) {
  const written: Uint8Array[] = [];
  let plugged = true;
  /** One after the other: a full terminal takes a chunk in parts. */
  let writing: Promise<void> = Promise.resolve();
  const source = new RehearsalSource({ rig, swimmer: { restS: 0.5, startS: 0.5 } });
  onTestFinished(() => source.stop());
  void source.run({
    bytes(chunk) {
      const sent = encode(chunk.slice());
      if (!plugged || sent.length === 0) return;
      written.push(sent);
      writing = writing.then(() => pty.write(sent)).catch(() => {});
    },
    linkState() {},
    mark() {},
  });
  return {
    written: () => Buffer.concat(written),
    unplug() {
      plugged = false;
      pty.unplug();
    },
    plugIn() {
      pty.plugIn();
      plugged = true;
    },
  };
}

/** Turns a rehearsal's native bytes into the lines a text hub would send. */
function toTextLines(rig: Rig): (bytes: Uint8Array) => Uint8Array {
  let lines = "";
  const ignore = () => {};
  const decoder = new NativeDecoder(rig.sensors.length, {
    sweep: (sweep) => {
      lines += encodeTextLine(sweep, rig.models);
    },
    hello: ignore,
    status: ignore,
    reference: ignore,
    sync: ignore,
    button: ignore,
  });
  return (bytes) => {
    lines = "";
    decoder.push(bytes, 0);
    return new TextEncoder().encode(lines);
  };
}

function recordedBytes(folder: string): Buffer {
  const reader = new TrialReader(folder);
  const chunks: Uint8Array[] = [];
  for (let record = reader.next(); record !== null; record = reader.next()) {
    if (record.kind === "bytes") chunks.push(record.chunk);
  }
  reader.close();
  return Buffer.concat(chunks);
}

function recordedChoices(folder: string): Choice[] {
  const reader = new TrialReader(folder);
  const choices: Choice[] = [];
  for (let record = reader.next(); record !== null; record = reader.next()) {
    if (record.kind === "choice") choices.push(record.choice);
  }
  reader.close();
  return choices;
}

test.each([
  ["binary", "native"],
  ["text", "text"],
])(
  "%s packets over a pseudo-terminal: the midline moves, every byte is kept, a mark is kept",
  async (_, layout) => {
    const rigPath = writeRig("ribbon-foil", (rig) => {
      rig.hub.layout = layout;
    });
    const rig = loadRig(rigPath);
    const pty = await openPty();
    onTestFinished(() => pty.close());
    const trial = join(temporaryFolder(), "trial");
    const bridge = await startBridge("live", "--rig", rigPath, "--port", pty.path, "--record", trial);
    const viewer = await viewStream(bridge.address);
    await viewer.until((v) => v.status?.link === "silent" || v.status?.link === "flowing");
    const hub = playHub(pty, rig, layout === "text" ? toTextLines(rig) : (bytes) => bytes);
    await viewer.until((v) => v.frame.sweepCount > 20);
    const tailAt = [...viewer.frame.midline.slice(-3)];
    await viewer.until((v) => Math.abs(v.frame.midline.at(-2)! - tailAt[1]!) > 0.01);
    expect(viewer.status?.recording).toMatchObject({ state: "on", detail: "trial" });
    viewer.send({ type: "add mark", text: "pump on" });
    viewer.send({ type: "choose", heading: "free" });
    await viewer.until((v) => v.status?.heading === "free" && v.frame.sweepCount > 150);
    const written = hub.written();
    bridge.child.kill("SIGINT");
    expect((await bridge.finished).code).toBe(0);

    const recorded = recordedBytes(trial);
    // The run ended at some point after `written` was taken; what was on its way then may be there or not.
    expect(recorded.length).toBeGreaterThan(10_000);
    const common = Math.min(recorded.length, written.length);
    expect(recorded.subarray(0, common).equals(written.subarray(0, common))).toBe(true);
    expect(JSON.parse(readFileSync(join(trial, "marks.jsonl"), "utf8"))).toMatchObject({ text: "pump on" });
    expect(recordedChoices(trial)).toEqual([{ heading: "free" }]);
    expect(await bendwatch("verify", trial)).toMatchObject({ code: 0 });
  },
);

test("unplugged and plugged in again, the run goes on and the gap is flagged", async () => {
  const pty = await openPty();
  onTestFinished(() => pty.close());
  const bridge = await startBridge("live", "--rig", "ribbon-foil", "--port", pty.path, "--no-record");
  const viewer = await viewStream(bridge.address);
  await viewer.until((v) => v.status?.link === "silent");
  const hub = playHub(pty, loadRig("ribbon-foil"), (bytes) => bytes);
  await viewer.until((v) => v.frame.sweepCount > 50);
  hub.unplug();
  await viewer.until((v) => v.status?.link === "closed" || v.status?.link === "opening");
  await viewer.until((v) => v.flags?.open.some(({ kind }) => kind === "link silent") === true);
  const before = viewer.frame.sweepCount;
  hub.plugIn();
  await viewer.until((v) => v.frame.sweepCount > before + 50);
  await viewer.until((v) => v.flags?.open.length === 0 && v.status?.link === "flowing");
  const [gap] = viewer.flags?.ended.filter(({ kind }) => kind === "link silent") ?? [];
  expect(gap?.endS).toBeGreaterThan(gap?.startS ?? Number.POSITIVE_INFINITY);
});

test("a stream that cannot be read is said so, with what to check", async () => {
  const pty = await openPty();
  onTestFinished(() => pty.close());
  const bridge = await startBridge("live", "--rig", "ribbon-foil", "--port", pty.path, "--no-record");
  const viewer = await viewStream(bridge.address);
  await viewer.until((v) => v.status?.link === "silent");
  await pty.write(new Uint8Array(20_000).map((_, i) => (i * 37) % 251));
  await viewer.until((v) => /no packet can be read: check/.test(v.status?.linkDetail ?? ""));
});
