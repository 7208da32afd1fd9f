/**
 * Notices when an open serial port has gone, and tells that from silence.
 *
 * The close event does not come on every platform and with every driver. So after a silence the port is asked: is it still
 * there, and does its handle answer? Gone or refused is a lost port. Present and answering is a hub that has nothing to
 * say: the port stays open. Where no answer comes at all, the handle may be dead: after a longer silence the port is
 * given up once, to be opened anew.
 */

/** Silence after which a port that does not answer is given up: longer than any driver takes to answer. */
const GIVE_UP_MS = 5000;

/** What is needed of a serial port; SerialPort of the serialport package has it. */
export interface SerialDevice {
  readonly isOpen: boolean;
  open(done: (error: Error | null) => void): void;
  close(done: (error: Error | null) => void): void;
  /** Waits until all output is sent. Nothing is ever sent, so a live port answers at once and a dead handle fails. */
  drain(done: (error: Error | null) => void): void;
  on(event: "data", listener: (chunk: Uint8Array) => void): unknown;
  on(event: "close" | "error", listener: (error: Error | null) => void): unknown;
}

/** lost: closed or gone. unanswering: there, but its handle is dead. stopped: `end` was called. */
export type PortEnd = "lost" | "unanswering" | "stopped";

export interface PortWatchOptions {
  /** Silence after which the port is asked, ms. */
  readonly silenceMs: number;
  /** May a port that does not answer be given up? */
  readonly mayGiveUp: () => boolean;
  /** Is the port still connected? A rejection counts as no answer. */
  readonly isPresent: () => Promise<boolean>;
}

export class PortWatch {
  /** Resolves with what ended the port. The port may still have to be closed. */
  readonly ended: Promise<PortEnd>;
  readonly #device: SerialDevice;
  readonly #options: PortWatchOptions;
  readonly #timer: NodeJS.Timeout;
  #resolve: (end: PortEnd) => void = () => {};
  #heardAtMs = performance.now();
  /** A question is out. */
  #asking = false;

  /** @param device open */
  constructor(device: SerialDevice, options: PortWatchOptions) {
    this.#device = device;
    this.#options = options;
    this.ended = new Promise((resolve) => {
      this.#resolve = resolve;
    });
    device.on("close", () => this.end("lost"));
    device.on("error", () => this.end("lost"));
    this.#timer = setInterval(() => this.#check(), options.silenceMs / 2);
  }

  /** Bytes came. */
  heard(): void {
    this.#heardAtMs = performance.now();
  }

  end(end: PortEnd): void {
    clearInterval(this.#timer);
    this.#resolve(end);
  }

  #check(): void {
    const silentMs = performance.now() - this.#heardAtMs;
    if (silentMs < this.#options.silenceMs) return;
    if (!this.#device.isOpen) this.end("lost");
    else if (!this.#asking) this.#ask();
    else if (silentMs >= GIVE_UP_MS && this.#options.mayGiveUp()) this.end("unanswering");
  }

  #ask(): void {
    this.#asking = true;
    const answer = (alive: boolean) => {
      this.#asking = false;
      if (!alive) this.end("lost");
    };
    this.#options.isPresent().then(
      (present) => (present ? this.#device.drain((error) => answer(error === null)) : answer(false)),
      () => {},
    );
  }
}
