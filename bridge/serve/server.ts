/**
 * HTTP and websocket: the dashboard's files at /, the stream at /stream. Knows viewers and messages, nothing of sensors.
 */
import { createServer, type IncomingMessage, type Server } from "node:http";
import type { AddressInfo } from "node:net";
import { networkInterfaces } from "node:os";
import type { Duplex } from "node:stream";
import { type WebSocket, WebSocketServer } from "ws";
import { BendwatchError } from "../errors.ts";
import {
  type BridgeMessage,
  type DashboardMessage,
  MAX_CLIENT_MESSAGE_BYTES,
  SUBPROTOCOL,
} from "../wire/messages.ts";
import { Access, type AccessOptions } from "./access.ts";
import { RateLimit, readClientMessage } from "./client-messages.ts";
import { DashboardFiles } from "./files.ts";
import { Viewer } from "./viewer.ts";

const PING_INTERVAL_MS = 5000;
const MAX_VIEWERS = 64;
const CLIENT_MESSAGES_PER_SECOND = 10;
/** Listen everywhere: no address that a browser could open. */
const ANY_ADDRESS = new Set(["0.0.0.0", "::"]);

export interface ServerOptions extends AccessOptions {
  /** 0 picks a free one. */
  readonly port: number;
  readonly dashboardFolder: string;
  /** What a newly connected viewer is sent first. */
  readonly greeting: () => readonly BridgeMessage[];
  /** The newest frame, so that who comes while nothing arrives sees the last shape; null before the first. Borrowed. */
  readonly newestFrame?: () => Uint8Array | null;
  readonly onMessage: (message: DashboardMessage) => void;
}

export class StreamServer {
  readonly #options: ServerOptions;
  readonly #access: Access;
  readonly #http: Server;
  readonly #sockets = new WebSocketServer({
    noServer: true,
    maxPayload: MAX_CLIENT_MESSAGE_BYTES,
    perMessageDeflate: false,
    handleProtocols: (offered) => (offered.has(SUBPROTOCOL) ? SUBPROTOCOL : false),
  });
  readonly #viewers = new Map<WebSocket, Viewer>();
  #pings: NodeJS.Timeout | undefined;

  constructor(options: ServerOptions) {
    this.#options = options;
    this.#access = new Access(options);
    const files = new DashboardFiles(options.dashboardFolder);
    this.#http = createServer((request, response) => {
      const refusal = this.#access.refusal(request);
      if (refusal === null) files.answer(request, response);
      else response.writeHead(403, { "content-type": "text/plain" }).end(`Refused: ${refusal}\n`);
    });
    this.#http.on("upgrade", (request, socket, head) => this.#upgrade(request, socket, head));
  }

  /** Starts listening. @returns the dashboard's address. @throws BendwatchError ADDRESS_IN_USE */
  async listen(): Promise<string> {
    const { host, port, token } = this.#options;
    await new Promise<void>((resolve, reject) => {
      this.#http.once("error", (cause: NodeJS.ErrnoException) =>
        reject(
          new BendwatchError(
            "ADDRESS_IN_USE",
            {
              where: `${host}:${port}`,
              found: cause.code ?? cause.message,
              expected: "an address free to listen on",
            },
            { cause },
          ),
        ),
      );
      this.#http.listen(port, host, resolve);
    });
    this.#pings = setInterval(() => this.#dropDeadViewers(), PING_INTERVAL_MS);
    const { port: actual } = this.#http.address() as AddressInfo;
    const shown = ANY_ADDRESS.has(host) ? (ownAddress() ?? host) : host;
    const name = shown.includes(":") ? `[${shown}]` : shown;
    return `http://${name}:${actual}/${token === undefined ? "" : `?token=${encodeURIComponent(token)}`}`;
  }

  async close(): Promise<void> {
    clearInterval(this.#pings);
    for (const socket of this.#viewers.keys()) socket.terminate();
    this.#sockets.close();
    this.#http.closeAllConnections();
    await new Promise((resolve) => this.#http.close(resolve));
  }

  /** Bytes that wait for viewers who read too slowly, all together. */
  get bytesWaiting(): number {
    let bytes = 0;
    for (const socket of this.#viewers.keys()) bytes += socket.bufferedAmount;
    return bytes;
  }

  /** Offers a frame to every viewer, after any text that still waits for it. */
  sendFrame(frame: Uint8Array): void {
    for (const viewer of this.#viewers.values()) {
      viewer.flush();
      viewer.offerFrame(frame);
    }
  }

  sendText(message: BridgeMessage): void {
    if (this.#viewers.size === 0) return;
    const text = JSON.stringify(message);
    for (const viewer of this.#viewers.values()) viewer.offerText(message.type, text);
  }

  #upgrade(request: IncomingMessage, socket: Duplex, head: Buffer): void {
    socket.on("error", () => socket.destroy());
    const path = (request.url ?? "").split("?", 1)[0];
    const offered = (request.headers["sec-websocket-protocol"] ?? "").split(",").map((name) => name.trim());
    const refusal = this.#access.streamRefusal(request);
    if (path !== "/stream") refuse(socket, 404, "there is no stream at this address");
    else if (refusal !== null) refuse(socket, 403, refusal);
    else if (!offered.includes(SUBPROTOCOL)) refuse(socket, 400, `this bridge speaks ${SUBPROTOCOL} only`);
    else if (this.#viewers.size >= MAX_VIEWERS) refuse(socket, 503, "too many viewers");
    else {
      this.#sockets.handleUpgrade(request, socket, head, (accepted) => this.#welcome(accepted));
    }
  }

  #welcome(socket: WebSocket): void {
    const viewer = new Viewer(socket);
    const limit = new RateLimit(CLIENT_MESSAGES_PER_SECOND);
    this.#viewers.set(socket, viewer);
    socket.on("close", () => this.#viewers.delete(socket));
    socket.on("error", () => socket.terminate());
    socket.on("pong", () => {
      viewer.alive = true;
    });
    socket.on("message", (data: Buffer, isBinary) => {
      const message = limit.allows(performance.now())
        ? readClientMessage(data, isBinary)
        : "too many messages";
      if (typeof message === "string") {
        viewer.offerText(
          "refusal",
          JSON.stringify({ type: "refusal", reason: message } satisfies BridgeMessage),
        );
      } else this.#options.onMessage(message);
    });
    for (const message of this.#options.greeting()) viewer.offerText(message.type, JSON.stringify(message));
    const frame = this.#options.newestFrame?.() ?? null;
    if (frame !== null) viewer.offerFrame(frame);
  }

  #dropDeadViewers(): void {
    for (const [socket, viewer] of this.#viewers) {
      if (!viewer.alive) {
        socket.terminate();
        continue;
      }
      viewer.alive = false;
      socket.ping();
    }
  }
}

/** An address of this machine by which others reach it, where it has one. */
function ownAddress(): string | undefined {
  const all = Object.values(networkInterfaces()).flatMap((addresses) => addresses ?? []);
  return all.find(({ internal, family }) => !internal && family === "IPv4")?.address;
}

function refuse(socket: Duplex, status: number, reason: string): void {
  const body = `Refused: ${reason}\n`;
  socket.end(
    `HTTP/1.1 ${status} Refused\r\ncontent-type: text/plain\r\ncontent-length: ${Buffer.byteLength(body)}\r\nconnection: close\r\n\r\n${body}`,
  );
}
