import { writeFileSync } from "node:fs";
import { get } from "node:http";
import { connect } from "node:net";
import { join } from "node:path";
import { afterEach, expect, test } from "vitest";
import { WebSocket } from "ws";
import { StreamServer } from "../../bridge/serve/server.ts";
import { type DashboardMessage, SUBPROTOCOL } from "../../bridge/wire/messages.ts";
import { temporaryFolder } from "../support/folders.ts";

const running: StreamServer[] = [];
afterEach(async () => {
  for (const server of running.splice(0)) await server.close();
});

async function start() {
  const dashboardFolder = temporaryFolder();
  writeFileSync(join(dashboardFolder, "index.html"), "<title>page</title>");
  const received: DashboardMessage[] = [];
  const server = new StreamServer({
    host: "127.0.0.1",
    port: 0,
    dashboardFolder,
    greeting: () => [{ type: "marks", marks: [] }],
    onMessage: (message) => received.push(message),
  });
  running.push(server);
  const address = await server.listen();
  return { server, address, received, stream: `${address.replace("http", "ws")}stream` };
}

/** Messages of a socket, awaited one by one. */
function reader(socket: WebSocket) {
  const waiting: ((data: string) => void)[] = [];
  const here: string[] = [];
  socket.on("message", (data: Buffer) => {
    const next = waiting.shift();
    if (next) next(data.toString());
    else here.push(data.toString());
  });
  return () =>
    new Promise<string>((resolve) => (here.length > 0 ? resolve(here.shift()!) : waiting.push(resolve)));
}

function statusOf(url: string, headers: Record<string, string> = {}): Promise<number> {
  return new Promise((resolve, reject) => {
    get(url, { headers }, (response) => {
      response.resume();
      resolve(response.statusCode ?? 0);
    }).on("error", reject);
  });
}

function handshakeStatus(url: string, protocol: string, origin?: string): Promise<number> {
  return new Promise((resolve) => {
    const socket = new WebSocket(url, protocol, origin === undefined ? {} : { origin });
    socket.on("unexpected-response", (_request, response) => {
      response.resume();
      resolve(response.statusCode ?? 0);
    });
    socket.on("open", () => {
      socket.close();
      resolve(101);
    });
    socket.on("error", () => {});
  });
}

test("a viewer is greeted, its mark is handed on, and nonsense is refused with a reason while it stays connected", async () => {
  const { stream, received } = await start();
  const socket = new WebSocket(stream, SUBPROTOCOL);
  const next = reader(socket);
  expect(JSON.parse(await next())).toEqual({ type: "marks", marks: [] });
  socket.send("nonsense");
  expect(JSON.parse(await next())).toEqual({ type: "refusal", reason: "not JSON" });
  socket.send(JSON.stringify({ type: "add mark", text: "pump on" }));
  socket.send("again");
  await next();
  expect(received).toEqual([{ type: "add mark", text: "pump on" }]);
  socket.terminate();
});

test("another version, another origin and another path are refused at the handshake", async () => {
  const { stream } = await start();
  expect(await handshakeStatus(stream, SUBPROTOCOL)).toBe(101);
  expect(await handshakeStatus(stream, "bendwatch.0")).toBe(400);
  expect(await handshakeStatus(stream, SUBPROTOCOL, "http://elsewhere.example")).toBe(403);
  expect(await handshakeStatus(stream.replace("stream", "other"), SUBPROTOCOL)).toBe(404);
});

test("the page is served with a strict policy; nothing outside the folder is", async () => {
  const { address } = await start();
  const page = await fetch(address);
  expect(await page.text()).toBe("<title>page</title>");
  expect(page.headers.get("content-security-policy")).toMatch(/script-src 'self';/);
  expect(await statusOf(`${address}%2e%2e/package.json`)).toBe(404);
  expect(await statusOf(`${address}../../etc/hostname`)).toBe(404);
  expect(await statusOf(address, { host: "rebound.example" })).toBe(403);
  expect((await fetch(address, { method: "POST" })).status).toBe(405);
});

test("a viewer that stops reading costs bounded memory, and the others get every frame", async () => {
  const { server, stream } = await start();
  const reading = new WebSocket(stream, SUBPROTOCOL);
  let frames = 0;
  const allFrames = new Promise<void>((resolve) => {
    reading.on("message", (_data, isBinary) => {
      if (isBinary && ++frames === 500) resolve();
    });
  });
  const stalled = new WebSocket(stream, SUBPROTOCOL);
  await Promise.all(
    [reading, stalled].map((socket) => new Promise((resolve) => socket.once("open", resolve))),
  );
  // Frames far beyond what the socket buffers of both ends can hold.
  stalled.pause();
  const frame = new Uint8Array(20_000);
  for (let i = 0; i < 500; i++) {
    server.sendFrame(frame);
    await new Promise((resolve) => setImmediate(resolve));
  }
  await allFrames;
  expect(frames).toBe(500);
  expect(server.bytesWaiting).toBeLessThanOrEqual(2 * 64 * 1024);
  stalled.terminate();
  reading.terminate();
});

test("broken handshakes and raw noise leave the server serving", async () => {
  const { address, stream } = await start();
  const port = Number(new URL(address).port);
  for (const noise of [
    "\x16\x03\x01\x02",
    "GET /stream HTTP/1.1\r\nUpgrade: websocket\r\nHost: localhost\r\n\r\n",
  ]) {
    await new Promise<void>((resolve) => {
      const raw = connect(port, "127.0.0.1", () => raw.end(noise));
      raw.on("data", () => {});
      raw.on("close", () => resolve());
      raw.on("error", () => {});
    });
  }
  expect(await handshakeStatus(stream, SUBPROTOCOL)).toBe(101);
});
