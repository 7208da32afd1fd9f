/**
 * A bridge without a rig: the real server and messages, an invented travelling wave, and everything else as a test wants
 * it. The midline is a function of hub time alone, so a test can compute what the page should show.
 */
import { createServer } from "node:http";
import type { AddressInfo } from "node:net";
import { join } from "node:path";
import type { Duplex } from "node:stream";
import { packageRoot } from "../../bridge/paths.ts";
import { every } from "../../bridge/serve/every.ts";
import { DashboardFiles } from "../../bridge/serve/files.ts";
import { StreamServer } from "../../bridge/serve/server.ts";
import { createDisplayFrame, encodeFrame, frameBytes } from "../../bridge/wire/frame.ts";
import type { BridgeMessage, DashboardMessage } from "../../bridge/wire/messages.ts";

import {
  FLOW_M_PER_S,
  healthyScene,
  midlineOf,
  type Scene,
  tailbeatOf,
  type Wave,
  writeMidline,
} from "./scene.ts";

const DASHBOARD = join(packageRoot, "dist", "dashboard");
const POINTS = 41;
const FRAMES_PER_S = 60;

export class FakeBridge {
  /** What dashboards sent. */
  readonly received: DashboardMessage[] = [];
  /** Why every mark is refused; null while they are taken. */
  refusing: string | null = null;
  address = "";
  #scene: Scene;
  #server: StreamServer | null = null;
  #port = 0;
  #run = 0;
  #frameNumber = 0;
  #hubTimeS: number;
  #timers: (() => void)[] = [];
  readonly #token: string | undefined;

  private constructor(scene: Scene, token: string | undefined) {
    this.#scene = scene;
    this.#token = token;
    this.#hubTimeS = scene.startS;
  }

  static async start(change: Partial<Scene> = {}, options: { token?: string } = {}): Promise<FakeBridge> {
    const bridge = new FakeBridge({ ...healthyScene(), ...change }, options.token);
    await bridge.listen();
    return bridge;
  }

  get scene(): Scene {
    return this.#scene;
  }

  get hubTimeS(): number {
    return this.#hubTimeS;
  }

  /** Starts serving, on the same port as before. */
  async listen(): Promise<void> {
    this.#server = new StreamServer({
      host: "127.0.0.1",
      port: this.#port,
      token: this.#token,
      dashboardFolder: DASHBOARD,
      greeting: () => this.#greeting(),
      onMessage: (message) => this.#take(message),
    });
    this.address = await this.#server.listen();
    this.#port = Number(new URL(this.address).port);
    this.#timers = [
      every(1000 / FRAMES_PER_S, () => this.#sendFrame()),
      every(500, () => this.#send(this.#status())),
      every(1000, () => this.#send(this.#strip())),
    ];
  }

  /** As when the program ends: connections break, the port is free. */
  async stop(): Promise<void> {
    for (const stopTimer of this.#timers.splice(0)) stopTimer();
    await this.#server?.close();
    this.#server = null;
  }

  /** Changes the scene and tells the viewers, as the bridge would. */
  show(change: Partial<Scene>): void {
    this.#scene = { ...this.#scene, ...change };
    for (const message of [this.#status(), this.#flags(), this.#marks()]) this.#send(message);
  }

  /** Hub time goes on, but nothing arrives. */
  skip(seconds: number): void {
    this.#hubTimeS += seconds;
  }

  /** As a bridge whose frames are of another layout. */
  sendBytes(bytes: Uint8Array): void {
    this.#server?.sendFrame(bytes);
  }

  /** As when a looped trial starts over: a new run, from hub time 0. */
  startOver(): void {
    this.#run++;
    this.#hubTimeS = 0;
    this.#scene = { ...this.#scene, startS: 0, marks: [], open: [], ended: [] };
    for (const message of this.#greeting()) this.#send(message);
  }

  #send(message: BridgeMessage): void {
    this.#server?.sendText(message);
  }

  #take(message: DashboardMessage): void {
    this.received.push(message);
    if (this.refusing !== null) {
      this.#send({ type: "refusal", reason: this.refusing });
      return;
    }
    if (message.type === "choose") {
      this.show({ heading: message.heading });
      return;
    }
    const mark = { timeS: this.#hubTimeS, text: message.text, from: "operator" } as const;
    this.show({ marks: [mark, ...this.#scene.marks] });
  }

  #sendFrame(): void {
    const scene = this.#scene;
    if (scene.link !== "flowing") return;
    this.#frameNumber++;
    this.#hubTimeS += 1 / FRAMES_PER_S;
    this.#server?.sendFrame(frameOf(scene, this.#hubTimeS, this.#frameNumber));
  }

  #greeting(): BridgeMessage[] {
    const { rigName, bodyKind, lengthM, widthM, rateHz, sensors, source, heading } = this.#scene;
    const welcome = {
      type: "welcome",
      softwareVersion: "0.1.0",
      rigName,
      bodyKind,
      lengthM,
      widthM,
      rateHz,
      sensors,
      pointCount: POINTS,
      source,
      heading,
      flowMPerS: FLOW_M_PER_S,
      runId: `invented-${this.#run}`,
    } as const;
    const messages = [welcome, this.#status(), this.#flags(), this.#marks(), this.#strip()];
    return this.#scene.drive === null ? messages : [...messages, this.#scene.drive];
  }

  #status(): BridgeMessage {
    const { link, linkDetail, recording, wave, lengthM, rateHz, lostShare, heading } = this.#scene;
    return {
      type: "status",
      hubTimeS: this.#hubTimeS,
      link,
      linkDetail,
      recording,
      sweepsPerS: link === "flowing" ? rateHz : 0,
      lostShare,
      behindMs: 1.4,
      driftPpm: 18,
      counters: { good: Math.round(this.#hubTimeS * rateHz), badChecksum: 3, discardedBytes: 41 },
      tailbeat: tailbeatOf(wave, lengthM),
      noseMoves: true,
      heading,
      chosenHeading: heading,
      midline: midlineOf(wave),
    };
  }

  #flags(): BridgeMessage {
    return { type: "flags", open: this.#scene.open, ended: this.#scene.ended };
  }

  #marks(): BridgeMessage {
    return { type: "marks", marks: this.#scene.marks };
  }

  #strip(): BridgeMessage {
    return stripOf(this.#scene.wave, this.#scene.lengthM, this.#hubTimeS);
  }
}

/** Bytes of the frame at a hub time. */
function frameOf(scene: Scene, timeS: number, frameNumber: number): Uint8Array {
  const count = scene.sensors.length;
  const frame = createDisplayFrame(POINTS, count);
  const { frequencyHz } = scene.wave;
  frame.frameNumber = frameNumber;
  frame.sweepCount = Math.round(timeS * scene.rateHz);
  frame.hubTimeS = timeS;
  frame.hostTimeMs = Date.now();
  frame.travelHeading = 0.4;
  frame.tailbeatPhase = frequencyHz > 0 ? (timeS * frequencyHz) % 1 : Number.NaN;
  writeMidline(scene.wave, scene.lengthM, timeS, frame.midline);
  for (let i = 0; i < count; i++) {
    const { gyro, accel, field, delivered, trust, conditions } = scene.reading(i, timeS);
    frame.sensorNumbers.set([gyro, accel, field, delivered], 4 * i);
    frame.sensorStates.set([trust, conditions], 2 * i);
  }
  const bytes = new Uint8Array(frameBytes(POINTS, count));
  encodeFrame(frame, new DataView(bytes.buffer));
  return bytes;
}

/** The last ten minutes: bouts of beating, rests, and twenty seconds that were not received. */
function stripOf({ tailShare }: Wave, lengthM: number, hubTimeS: number): BridgeMessage {
  const startS = Math.max(0, Math.floor(hubTimeS) - 599);
  const lowM: (number | null)[] = [];
  const highM: (number | null)[] = [];
  for (let second = startS; second <= hubTimeS; second++) {
    const missing = second % 400 >= 250 && second % 400 < 270;
    const vigour = second % 90 < 70 ? 1 + 0.15 * Math.sin(second / 7) : 0.1;
    const tail = Math.round(tailShare * lengthM * vigour * 1e4) / 1e4;
    lowM.push(missing ? null : -tail);
    highM.push(missing ? null : tail);
  }
  return { type: "strip", startS, columnS: 1, lowM, highM };
}

/**
 * A server that shows the page and has no stream for it: it refuses every viewer, as a bridge of another version does, or
 * leaves the handshake without an answer.
 */
export async function startPageWithoutStream(
  manner: "refuses" | "silent",
): Promise<{ address: string; stop(): Promise<void> }> {
  const files = new DashboardFiles(DASHBOARD);
  const server = createServer((request, response) => files.answer(request, response));
  const waiting: Duplex[] = [];
  server.on("upgrade", (_request, socket) => {
    waiting.push(socket);
    if (manner === "silent") return;
    socket.end("HTTP/1.1 400 Refused\r\ncontent-length: 0\r\nconnection: close\r\n\r\n");
  });
  await new Promise<void>((resolve) => server.listen(0, "127.0.0.1", resolve));
  return {
    address: `http://127.0.0.1:${(server.address() as AddressInfo).port}/`,
    async stop() {
      for (const socket of waiting) socket.destroy();
      server.closeAllConnections();
      await new Promise((resolve) => server.close(resolve));
    },
  };
}
