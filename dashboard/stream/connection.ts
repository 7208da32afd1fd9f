/** The websocket to the bridge: connects, reads, reconnects by itself. Handlers do nothing but fill the view state. */
import { type BridgeMessage, type DashboardMessage, SUBPROTOCOL } from "../../bridge/wire/messages.ts";
import type { ViewState } from "./view-state.ts";

const FIRST_RETRY_MS = 250;
const LONGEST_RETRY_MS = 2000;
/** Handshakes in a row that the bridge, though there, turned down: it speaks another version. */
const REFUSALS_TO_TELL = 2;

export class Connection {
  readonly #view: ViewState;
  readonly #onChange: () => void;
  #socket: WebSocket | null = null;
  #retryMs = FIRST_RETRY_MS;
  #refusals = 0;

  /** @param onChange called after every message, frame or change of connection */
  constructor(view: ViewState, onChange: () => void) {
    this.#view = view;
    this.#onChange = onChange;
    this.#open();
  }

  /** @returns false when there is no connection to send on */
  send(message: DashboardMessage): boolean {
    if (this.#socket?.readyState !== WebSocket.OPEN) return false;
    this.#socket.send(JSON.stringify(message));
    return true;
  }

  #open(): void {
    const socket = new WebSocket(streamAddress(), SUBPROTOCOL);
    socket.binaryType = "arraybuffer";
    this.#socket = socket;
    let opened = false;
    socket.onopen = () => {
      opened = true;
      this.#retryMs = FIRST_RETRY_MS;
      this.#refusals = 0;
      this.#view.setConnection("connected");
      this.#onChange();
    };
    socket.onmessage = ({ data }: MessageEvent<string | ArrayBuffer>) => {
      if (typeof data === "string") this.#view.takeMessage(JSON.parse(data) as BridgeMessage);
      else this.#view.takeFrame(data, performance.now());
      this.#onChange();
    };
    socket.onclose = () => void this.#closed(opened);
  }

  async #closed(opened: boolean): Promise<void> {
    // A browser does not say why a handshake failed. When the page itself still answers, the bridge turned us down.
    const refused = !opened && (await bridgeAnswers());
    this.#refusals = refused ? this.#refusals + 1 : 0;
    if (this.#refusals >= REFUSALS_TO_TELL) this.#view.setConnection("refused");
    else if (this.#view.connection !== "connecting" || this.#view.welcome !== null)
      this.#view.setConnection("gone");
    this.#onChange();
    setTimeout(() => this.#open(), this.#retryMs);
    this.#retryMs = Math.min(LONGEST_RETRY_MS, this.#retryMs * 1.5);
  }
}

function streamAddress(): string {
  const address = new URL("stream", location.href);
  address.protocol = location.protocol === "https:" ? "wss:" : "ws:";
  address.search = "";
  const token = new URLSearchParams(location.search).get("token");
  if (token !== null) address.searchParams.set("token", token);
  return address.href;
}

async function bridgeAnswers(): Promise<boolean> {
  try {
    return (await fetch(location.pathname, { method: "HEAD", cache: "no-store" })).ok;
  } catch {
    return false;
  }
}
