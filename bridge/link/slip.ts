/**
 * SLIP: J. Romkey, RFC 1055, 1988. Frames end with END; inside, END and ESC are written as ESC ESC_END and ESC ESC_ESC.
 * Where the RFC would keep a byte that wrongly follows ESC, we drop the frame: nothing damaged is passed on.
 */
import { countFrame, type FrameHandler, type Framer, VERDICT } from "./framing.ts";
import type { LinkCounters } from "./packets.ts";

const END = 0xc0;
const ESC = 0xdb;
const ESC_END = 0xdc;
const ESC_ESC = 0xdd;

const IN_FRAME = 0;
/** Just after ESC. */
const ESCAPED = 1;
/** After a wrong escape: waiting for END. */
const BROKEN = 2;
/** Over-long: waiting for END. */
const SKIPPING = 3;

/** Takes SLIP frames apart. An empty frame (END after END) is ignored, as the RFC asks. */
export class SlipFramer implements Framer {
  readonly buffer: Uint8Array;
  readonly #counters: LinkCounters;
  readonly #onFrame: FrameHandler;
  #state = IN_FRAME;
  #length = 0;
  /** Bytes of this frame as received, unless already counted as discarded. */
  #rawBytes = 0;

  /** @param maxBytes longest legal frame, decoded */
  constructor(maxBytes: number, counters: LinkCounters, onFrame: FrameHandler) {
    this.buffer = new Uint8Array(maxBytes);
    this.#counters = counters;
    this.#onFrame = onFrame;
  }

  push(chunk: Uint8Array): void {
    for (let i = 0; i < chunk.length; i++) {
      const byte = chunk[i];
      if (byte === END) {
        this.#end();
        continue;
      }
      this.#rawBytes++;
      if (this.#state === IN_FRAME) {
        if (byte === ESC) this.#state = ESCAPED;
        else this.#append(byte);
      } else if (this.#state === ESCAPED) {
        this.#escaped(byte);
      } else {
        this.#discard();
      }
    }
  }

  #escaped(byte: number): void {
    this.#state = IN_FRAME;
    if (byte === ESC_END) this.#append(END);
    else if (byte === ESC_ESC) this.#append(ESC);
    else this.#state = BROKEN;
  }

  #append(byte: number): void {
    if (this.#length < this.buffer.length) {
      this.buffer[this.#length++] = byte;
      return;
    }
    this.#counters.overLong++;
    this.#discard();
    this.#state = SKIPPING;
  }

  #discard(): void {
    this.#counters.discardedBytes += this.#rawBytes;
    this.#rawBytes = 0;
  }

  #end(): void {
    if (this.#state === SKIPPING) this.#counters.discardedBytes++;
    else if (this.#state !== IN_FRAME) countFrame(this.#counters, VERDICT.BROKEN, this.#rawBytes + 1);
    else if (this.#length > 0) {
      countFrame(this.#counters, this.#onFrame(this.#length), this.#rawBytes + 1);
    }
    this.#state = IN_FRAME;
    this.#length = 0;
    this.#rawBytes = 0;
  }
}
