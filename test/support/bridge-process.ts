/** The built program as a user runs it: a process of its own, its dashboard's address, and a viewer of its stream. */
import { type ChildProcess, spawn } from "node:child_process";
import { join } from "node:path";
import { onTestFinished } from "vitest";
import { WebSocket } from "ws";
import { packageRoot } from "../../bridge/paths.ts";
import { createDisplayFrame, type DisplayFrame, decodeFrame } from "../../bridge/wire/frame.ts";
import {
  type BridgeMessage,
  type FlagsMessage,
  type StatusMessage,
  SUBPROTOCOL,
  type WelcomeMessage,
} from "../../bridge/wire/messages.ts";

const PROGRAM = join(packageRoot, "dist", "bendwatch.js");

export interface Finished {
  readonly code: number | null;
  readonly out: string;
  readonly err: string;
}

function launch(args: readonly string[]) {
  const child = spawn(process.execPath, [PROGRAM, ...args], { stdio: ["ignore", "pipe", "pipe"] });
  onTestFinished(() => {
    child.kill("SIGKILL");
  });
  const text = { out: "", err: "" };
  child.stdout.on("data", (data: Buffer) => {
    text.out += data.toString();
  });
  child.stderr.on("data", (data: Buffer) => {
    text.err += data.toString();
  });
  const finished = new Promise<Finished>((resolve) =>
    child.on("close", (code) => resolve({ code, ...text })),
  );
  return { child, text, finished };
}

/** Runs a command to its end. */
export function bendwatch(...args: string[]): Promise<Finished> {
  return launch(args).finished;
}

export interface RunningBridge {
  readonly child: ChildProcess;
  /** All it has printed so far. */
  readonly out: () => string;
  readonly address: string;
  readonly finished: Promise<Finished>;
}

/** Starts a command that serves the dashboard, on a free port unless the arguments name one, and waits for its address. */
export async function startBridge(...args: string[]): Promise<RunningBridge> {
  const { child, text, finished } = launch(
    args.includes("--http-port") ? args : [...args, "--http-port", "0"],
  );
  const address = await new Promise<string>((resolve, reject) => {
    child.stdout.on("data", () => {
      const found = /http:\/\/\S+/.exec(text.out);
      if (found) resolve(found[0]);
    });
    void finished.then(({ err }) => reject(new Error(`the bridge ended: ${err}`)));
  });
  return { child, out: () => text.out, address, finished };
}

/** A viewer without a browser: the newest of everything the bridge sent. */
export interface StreamViewer {
  readonly welcome: WelcomeMessage | null;
  readonly status: StatusMessage | null;
  readonly flags: FlagsMessage | null;
  readonly frame: DisplayFrame;
  readonly frames: number;
  send(message: object): void;
  /** Resolves as soon as `condition` holds; checked at every message. */
  until(condition: (viewer: StreamViewer) => boolean): Promise<void>;
}

export async function viewStream(address: string): Promise<StreamViewer> {
  const url = new URL("stream", address);
  url.protocol = "ws:";
  const socket = new WebSocket(url, SUBPROTOCOL);
  onTestFinished(() => socket.terminate());
  const waiting = new Set<() => void>();
  const viewer = {
    welcome: null as WelcomeMessage | null,
    status: null as StatusMessage | null,
    flags: null as FlagsMessage | null,
    frame: createDisplayFrame(0, 0),
    frames: 0,
    send: (message: object) => socket.send(JSON.stringify(message)),
    until: (condition: (v: StreamViewer) => boolean) =>
      new Promise<void>((resolve) => {
        const check = () => {
          if (!condition(viewer)) return;
          waiting.delete(check);
          resolve();
        };
        waiting.add(check);
        check();
      }),
  };
  socket.on("message", (data: Buffer, isBinary) => {
    if (isBinary) {
      if (decodeFrame(new DataView(data.buffer, data.byteOffset, data.length), viewer.frame)) viewer.frames++;
    } else {
      const message = JSON.parse(data.toString()) as BridgeMessage;
      if (message.type === "welcome") viewer.welcome = message;
      if (message.type === "status") viewer.status = message;
      if (message.type === "flags") viewer.flags = message;
    }
    for (const check of [...waiting]) check();
  });
  await new Promise((resolve, reject) => {
    socket.once("open", resolve);
    socket.once("error", reject);
  });
  return viewer;
}
