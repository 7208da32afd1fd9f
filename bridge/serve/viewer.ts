/**
 * One connected viewer. A slow one loses frames, never memory, and never slows the others: before each send the bytes
 * still waiting for it, the new ones included, are held against a limit. Frames over the limit are skipped; of the text
 * messages only the newest of each type waits, since each states the whole of what it is about.
 */
import type { WebSocket } from "ws";
import type { BridgeMessage } from "../wire/messages.ts";

/** A handful of frames: enough to ride out a hiccup, too little to fall seconds behind. */
export const VIEWER_QUEUE_BYTES = 64 * 1024;

export class Viewer {
  framesSkipped = 0;
  /** Set false at each ping, true at each answer. */
  alive = true;
  readonly #socket: WebSocket;
  readonly #waiting = new Map<BridgeMessage["type"], string>();

  constructor(socket: WebSocket) {
    this.#socket = socket;
  }

  /** Sends a binary frame, or skips it. `frame` may be reused after the call: what cannot go out at once is not kept. */
  offerFrame(frame: Uint8Array): void {
    if (!this.#hasRoom(frame.byteLength)) {
      this.framesSkipped++;
      return;
    }
    // ws may hold on to the bytes until the socket takes them: it gets a copy of its own.
    this.#socket.send(frame.slice());
  }

  /** Sends a text message now, or, when the viewer is behind, once it has caught up and if no newer one came. */
  offerText(type: BridgeMessage["type"], text: string): void {
    this.#waiting.delete(type);
    this.#waiting.set(type, text);
    this.flush();
  }

  /** Sends waiting text as far as there is room. Called at display rate. */
  flush(): void {
    for (const [type, text] of this.#waiting) {
      if (!this.#hasRoom(text.length)) return;
      this.#waiting.delete(type);
      this.#socket.send(text);
    }
  }

  #hasRoom(bytes: number): boolean {
    const socket = this.#socket;
    if (socket.readyState !== socket.OPEN) return false;
    // A message longer than the limit itself goes out alone, on an empty queue.
    return socket.bufferedAmount === 0 || socket.bufferedAmount + bytes <= VIEWER_QUEUE_BYTES;
  }
}
