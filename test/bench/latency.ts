/**
 * Bytes in to websocket frame out, 16 sensors x 200 Hz, through the real server and a real socket on this machine. For
 * every sweep: from the arrival of its last byte to the arrival, at a viewer, of the first frame that contains it. The
 * display interval is part of it: a sweep that just missed a frame waits for the next.
 */
import { mkdtempSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { WebSocket } from "ws";
import type { ByteSource } from "../../bridge/link/source.ts";
import { RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";
import { loadRig } from "../../bridge/rig/load.ts";
import { Monitor } from "../../bridge/serve/monitor.ts";
import { createDisplayFrame, decodeFrame } from "../../bridge/wire/frame.ts";
import { SUBPROTOCOL } from "../../bridge/wire/messages.ts";

export const name = "latency: bytes in to websocket frame out, 16 sensors x 200 Hz";

const SECONDS = 20;
const WARM_UP_S = 2;
const DISPLAY_INTERVAL_MS = 1000 / 60;

export async function run() {
  const rig = loadRig("long-dummy");
  const rehearsal = new RehearsalSource({ rig, durationS: SECONDS });
  /** When the bytes came that completed sweep n, counting from 1. */
  const arrivedMs: number[] = [];
  const source: ByteSource = {
    label: rehearsal.label,
    kind: rehearsal.kind,
    stop: () => rehearsal.stop(),
    run: (sink) =>
      rehearsal.run({
        bytes(chunk, hostTimeMs) {
          const nowMs = performance.now();
          sink.bytes(chunk, hostTimeMs);
          const done = (sink as Monitor).sweepCount;
          while (arrivedMs.length < done) arrivedMs.push(nowMs);
        },
        linkState: (state, detail, hostTimeMs) => sink.linkState(state, detail, hostTimeMs),
        mark() {},
      }),
  };
  const dashboardFolder = mkdtempSync(join(tmpdir(), "bendwatch-bench-"));
  writeFileSync(join(dashboardFolder, "index.html"), "");
  const monitor = new Monitor({
    rig,
    source,
    recorder: null,
    startedAt: new Date(),
    dashboardFolder,
    host: "127.0.0.1",
    port: 0,
  });
  const socket = new WebSocket(`${(await monitor.listen()).replace("http", "ws")}stream`, SUBPROTOCOL);
  const frame = createDisplayFrame(0, 0);
  const latenciesMs: number[] = [];
  let frames = 0;
  let seen = 0;
  socket.on("message", (data: Buffer, isBinary) => {
    const nowMs = performance.now();
    if (!isBinary || !decodeFrame(new DataView(data.buffer, data.byteOffset, data.length), frame)) return;
    frames++;
    for (; seen < frame.sweepCount; seen++) {
      if (seen >= WARM_UP_S * rig.hub.rateHz) latenciesMs.push(nowMs - arrivedMs[seen]!);
    }
  });
  await new Promise((resolve) => socket.once("open", resolve));
  await monitor.run();
  socket.terminate();
  await monitor.close();
  latenciesMs.sort((a, b) => a - b);
  const at = (share: number) => latenciesMs[Math.floor(share * (latenciesMs.length - 1))]!;
  const json = {
    sweeps: latenciesMs.length,
    framesPerS: frames / SECONDS,
    displayIntervalMs: DISPLAY_INTERVAL_MS,
    medianMs: at(0.5),
    p99Ms: at(0.99),
    p99BeyondIntervalMs: at(0.99) - DISPLAY_INTERVAL_MS,
    worstMs: at(1),
  };
  const rows = Object.entries(json).map(([what, value]) => ({ what, value: Number(value.toFixed(2)) }));
  return { rows, json };
}
