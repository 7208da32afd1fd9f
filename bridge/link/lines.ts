/** Lines of text as frames: ended by LF or CR LF, handed over without them. Empty lines are ignored. */
import { countFrame, type FrameHandler, type Framer } from "./framing.ts";
import type { LinkCounters } from "./packets.ts";

const LF = 0x0a;
const CR = 0x0d;

const IN_LINE = 0;
/** Over-long: waiting for LF. */
const SKIPPING = 1;

export class LineFramer implements Framer {
  readonly buffer: Uint8Array;
  readonly #counters: LinkCounters;
  readonly #onFrame: FrameHandler;
  #state = IN_LINE;
  #length = 0;

  /** @param maxBytes longest legal line, its CR included */
  constructor(maxBytes: number, counters: LinkCounters, onFrame: FrameHandler) {
    this.buffer = new Uint8Array(maxBytes);
    this.#counters = counters;
    this.#onFrame = onFrame;
  }

  push(chunk: Uint8Array): void {
    for (let i = 0; i < chunk.length; i++) {
      const byte = chunk[i];
      if (byte === LF) this.#end();
      else if (this.#state === SKIPPING) this.#counters.discardedBytes++;
      else if (this.#length < this.buffer.length) this.buffer[this.#length++] = byte;
      else this.#overflow();
    }
  }

  #overflow(): void {
    this.#counters.overLong++;
    this.#counters.discardedBytes += this.#length + 1;
    this.#state = SKIPPING;
  }

  #end(): void {
    if (this.#state === SKIPPING) {
      this.#counters.discardedBytes++;
    } else {
      const hasReturn = this.#length > 0 && this.buffer[this.#length - 1] === CR;
      const length = hasReturn ? this.#length - 1 : this.#length;
      if (length > 0) countFrame(this.#counters, this.#onFrame(length), this.#length + 1);
    }
    this.#state = IN_LINE;
    this.#length = 0;
  }
}
