/**
 * The websocket to the bridge: opens it, feeds the view state, and opens it again whenever it ends. When a handshake
 * fails the browser does not say why, so the page asks the bridge's web server: no answer means it is gone; an answer
 * with another dashboard in it means another version; the same dashboard means it refuses this page.
 */
import { type BridgeMessage, type DashboardMessage, SUBPROTOCOL } from "../../bridge/wire/messages.ts";
import { setBridge, takeFrame, takeMessage, type ViewState } from "./view-state.ts";

/** First wait before trying again, ms; doubles up to the longest. */
const FIRST_WAIT_MS = 250;
const LONGEST_WAIT_MS = 2000;
/** Handshakes in a row that fail though the bridge answers, before the page says so. */
const REFUSALS_TO_TELL = 2;

export class Connection {
  readonly #view: ViewState;
  readonly #onChange: () => void;
  readonly #url: string;
  #socket: WebSocket | undefined;
  #waitMs = FIRST_WAIT_MS;
  #refusals = 0;

  /**
   * @param page address of this page: gives host and token
   * @param onChange called after every message, frame or change of connection
   */
  constructor(view: ViewState, page: URL, onChange: () => void) {
    this.#view = view;
    this.#onChange = onChange;
    const url = new URL("stream", page);
    url.protocol = page.protocol === "https:" ? "wss:" : "ws:";
    const token = page.searchParams.get("token");
    if (token !== null) url.searchParams.set("token", token);
    this.#url = url.href;
  }

  open(): void {
    const view = this.#view;
    const socket = new WebSocket(this.#url, SUBPROTOCOL);
    this.#socket = socket;
    socket.binaryType = "arraybuffer";
    let opened = false;
    socket.onopen = () => {
      opened = true;
      this.#refusals = 0;
      setBridge(view, "connected");
      this.#onChange();
    };
    socket.onmessage = ({ data }: MessageEvent<string | ArrayBuffer>) => {
      this.#waitMs = FIRST_WAIT_MS;
      if (typeof data === "string") takeMessage(view, JSON.parse(data) as BridgeMessage);
      else if (!takeFrame(view, new DataView(data), performance.now())) setBridge(view, "other version");
      this.#onChange();
    };
    socket.onclose = () => void this.#closed(opened);
  }

  /** @returns false when there is no bridge to send to */
  send(message: DashboardMessage): boolean {
    if (this.#socket?.readyState !== WebSocket.OPEN) return false;
    this.#socket.send(JSON.stringify(message));
    return true;
  }

  async #closed(opened: boolean): Promise<void> {
    const why = opened ? "gone" : await whyRefused();
    // A bridge that is just starting may show the page a moment before it has a stream.
    this.#refusals = why === "gone" ? 0 : this.#refusals + 1;
    if (why === "gone" || this.#refusals >= REFUSALS_TO_TELL) setBridge(this.#view, why);
    this.#onChange();
    setTimeout(() => this.open(), this.#waitMs);
    this.#waitMs = Math.min(LONGEST_WAIT_MS, this.#waitMs * 2);
  }
}

async function whyRefused(): Promise<"gone" | "other version" | "refused"> {
  try {
    const answer = await fetch("./", { cache: "no-store" });
    if (!answer.ok) return "refused";
    const page = await answer.text();
    const own = document.querySelector<HTMLScriptElement>("script[type=module]")?.getAttribute("src") ?? "";
    return page.includes(own) ? "refused" : "other version";
  } catch {
    return "gone";
  }
}
