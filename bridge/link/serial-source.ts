/**
 * Bytes from a serial port, for as long as it takes: opens the port, delivers what comes, and opens it again after every
 * loss, also when the device comes back under another path with the same USB serial number. A port that is not there yet
 * is waited for. Nothing short of `stop` ends it.
 *
 * Opening a port empties the system's buffers; from then on every byte read is delivered, also those that were still on
 * their way when the port closed.
 */
import { SerialPort } from "serialport";
import { BendwatchError } from "../errors.ts";
import { PortWatch, type SerialDevice } from "./port-watch.ts";
import { findPort, type PortChoice } from "./ports.ts";
import type { ByteSink, ByteSource, LinkState } from "./source.ts";

export interface SerialOptions {
  readonly port: PortChoice;
  readonly baudRate: number;
  /** Silence after which the port is checked for having gone, ms; 1000 if left out. */
  readonly silenceMs?: number;
  /** Wait before the second attempt to open, ms; 500 if left out. It grows by half each time, up to 2 s. */
  readonly retryMs?: number;
  /** How ports are found and made; a test puts its own here. */
  readonly find?: (choice: PortChoice) => Promise<string>;
  readonly create?: (path: string, baudRate: number) => SerialDevice;
}

const RETRY_GROWTH = 1.5;
const LONGEST_RETRY_MS = 2000;

export class SerialSource implements ByteSource {
  readonly kind = "serial";
  readonly label: string;
  readonly #options: Required<SerialOptions>;
  #sink: ByteSink | null = null;
  #watch: PortWatch | null = null;
  /** Path of the port that was open last, null before the first. */
  #lastPath: string | null = null;
  /** A silent port is given up once; bytes allow it again. */
  #gaveUp = false;
  #reported = "";
  #stopped = false;
  #wakeUp: () => void = () => {};
  #finished: Promise<void> = Promise.resolve();

  constructor(options: SerialOptions) {
    this.#options = { silenceMs: 1000, retryMs: 500, find: findPort, create: createPort, ...options };
    this.label = `serial ${this.#name}`;
  }

  run(sink: ByteSink): Promise<void> {
    this.#sink = sink;
    this.#finished = this.#run();
    return this.#finished;
  }

  async stop(): Promise<void> {
    this.#stopped = true;
    this.#wakeUp();
    await this.#finished;
  }

  get #name(): string {
    const { path, usbSerialNumber } = this.#options.port;
    return path ?? `with USB serial number ${usbSerialNumber}`;
  }

  async #run(): Promise<void> {
    const { retryMs } = this.#options;
    this.#report("opening", `Opening port ${this.#name}.`);
    let waitMs = retryMs;
    while (!this.#stopped) {
      const device = await this.#open();
      if (device !== null) {
        await this.#readUntilLost(device);
        waitMs = retryMs;
      }
      await this.#wait(waitMs);
      waitMs = Math.min(waitMs * RETRY_GROWTH, LONGEST_RETRY_MS);
    }
    this.#report("ended", "Stopped.");
    this.#sink = null;
  }

  /** One attempt. @returns null when the port cannot be opened now */
  async #open(): Promise<SerialDevice | null> {
    const { find, create, port, baudRate } = this.#options;
    let path: string | null = null;
    try {
      path = await find(port);
      if (this.#stopped) return null;
      const device = create(path, baudRate);
      device.on("data", (chunk) => this.#received(chunk));
      await outcome((done) => device.open(done));
      this.#lastPath = path;
      return device;
    } catch (error) {
      const state = this.#lastPath === null ? "opening" : "closed";
      this.#report(state, path === null ? this.#absence(error) : openingTrouble(path, error));
      return null;
    }
  }

  async #readUntilLost(device: SerialDevice): Promise<void> {
    const { find, baudRate, silenceMs } = this.#options;
    const path = this.#lastPath!;
    const watch = new PortWatch(device, {
      silenceMs,
      mayGiveUp: () => !this.#gaveUp,
      isPresent: () => find({ path }).then(() => true, notFoundIsFalse),
    });
    this.#watch = watch;
    this.#wakeUp = () => watch.end("stopped");
    if (this.#stopped) watch.end("stopped");
    else this.#report("open", `Reading ${path} at ${baudRate} baud.`);
    const end = await watch.ended;
    this.#watch = null;
    if (end === "unanswering") this.#gaveUp = true;
    if (end === "lost") this.#report("closed", lostDetail(path));
    if (end === "unanswering") this.#report("closed", `${path} does not answer; opening it again.`);
    // An error in closing leaves nothing to be done: the port is not used again.
    if (device.isOpen) await outcome((done) => device.close(done)).catch(() => {});
  }

  #received(chunk: Uint8Array): void {
    this.#watch?.heard();
    this.#gaveUp = false;
    this.#sink?.bytes(chunk, Date.now());
  }

  /** Tells the sink, once: attempts that fail for the same reason are not news. */
  #report(state: LinkState, detail: string): void {
    const report = `${state}: ${detail}`;
    if (report === this.#reported) return;
    this.#reported = report;
    this.#sink?.linkState(state, detail, Date.now());
  }

  #absence(error: unknown): string {
    if (!isNotFound(error)) return `Cannot list the ports: ${textOf(error)}. Trying again.`;
    if (this.#lastPath !== null) return lostDetail(this.#lastPath);
    return `No port ${this.#name} yet; trying again. \`bendwatch ports\` lists what is connected.`;
  }

  /** `stop` cuts it short. */
  #wait(ms: number): Promise<void> {
    if (this.#stopped) return Promise.resolve();
    return new Promise((resolve) => {
      const timer = setTimeout(resolve, ms);
      this.#wakeUp = () => {
        clearTimeout(timer);
        resolve();
      };
    });
  }
}

function createPort(path: string, baudRate: number): SerialDevice {
  return new SerialPort({ path, baudRate, autoOpen: false });
}

function outcome(action: (done: (error: Error | null) => void) => void): Promise<void> {
  return new Promise((resolve, reject) => action((error) => (error ? reject(error) : resolve())));
}

function isNotFound(error: unknown): boolean {
  return error instanceof BendwatchError && error.code === "PORT_NOT_FOUND";
}

function notFoundIsFalse(error: unknown): false {
  if (isNotFound(error)) return false;
  throw error;
}

function lostDetail(path: string): string {
  return `Lost ${path}: unplugged or switched off. Trying again until it is back.`;
}

function openingTrouble(path: string, error: unknown): string {
  const text = textOf(error);
  return `Cannot open ${path}: ${text}.${hint(text)} Trying again.`;
}

/** The two usual reasons, by the words the systems use for them. */
function hint(text: string): string {
  if (/permission/i.test(text)) return " On Linux, join the group that owns it, often dialout.";
  if (/lock|busy|access denied/i.test(text)) return " Another program may have it open.";
  return "";
}

function textOf(error: unknown): string {
  return (error instanceof Error ? error.message : String(error)).replace(/^(Error:? )+|\.$/g, "");
}
