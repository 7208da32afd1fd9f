/**
 * What the page knows: the newest frame, the recent past, and the newest of each text message. Written by the socket's
 * handlers only; read by lanes and panels when they draw.
 */
import { createDisplayFrame, type DisplayFrame, decodeFrame } from "../../bridge/wire/frame.ts";
import type {
  BridgeMessage,
  FlagsMessage,
  MarksMessage,
  StatusMessage,
  StripMessage,
  WelcomeMessage,
} from "../../bridge/wire/messages.ts";
import { History } from "./history.ts";

/** connecting: never yet connected. gone: was connected, trying again. refused: the bridge speaks another version. */
export type Connection = "connecting" | "connected" | "gone" | "refused";

export class ViewState {
  connection: Connection = "connecting";
  welcome: WelcomeMessage | null = null;
  status: StatusMessage | null = null;
  flags: FlagsMessage = { type: "flags", open: [], ended: [] };
  marks: MarksMessage = { type: "marks", marks: [] };
  strip: StripMessage | null = null;
  /** Reused for every frame; hasFrame says whether it holds one of this run. */
  readonly frame: DisplayFrame = createDisplayFrame(0, 0);
  hasFrame = false;
  history = new History(0);
  /** Page time of the newest frame, ms. */
  frameAtMs = 0;
  /** Grows with every text message and change of connection: panels redraw when it did. */
  revision = 0;
  /** Grows with every new run: lanes clear their past. */
  run = 0;

  /** @returns false when the bytes are no frame of this version */
  takeFrame(bytes: ArrayBuffer, nowMs: number): boolean {
    if (!decodeFrame(new DataView(bytes), this.frame)) return false;
    if (this.history.pointCount !== this.frame.pointCount) this.history = new History(this.frame.pointCount);
    this.history.add(this.frame.hubTimeS, this.frame.midline);
    this.hasFrame = true;
    this.frameAtMs = nowMs;
    return true;
  }

  takeMessage(message: BridgeMessage): void {
    this.revision++;
    switch (message.type) {
      case "welcome":
        if (message.runId !== this.welcome?.runId) this.#startRun();
        this.welcome = message;
        return;
      case "status":
        this.status = message;
        return;
      case "flags":
        this.flags = message;
        return;
      case "marks":
        this.marks = message;
        return;
      case "strip":
        this.strip = message;
        return;
      case "refusal":
        console.warn(`The bridge refused a message: ${message.reason}`);
    }
  }

  setConnection(connection: Connection): void {
    if (connection === this.connection) return;
    this.connection = connection;
    this.revision++;
  }

  /** Whether what is shown is now: sweeps are flowing. */
  get live(): boolean {
    return this.connection === "connected" && this.status?.link === "flowing";
  }

  #startRun(): void {
    this.run++;
    this.hasFrame = false;
    this.history = new History(this.frame.pointCount);
    this.strip = null;
  }
}
