/**
 * Frames without a delimiter: found by a sync word at their start, a length (sent or fixed) and the checksum. When any
 * of these fails, the start was a false one and the search goes on one byte past it, over the bytes already received:
 * a sync word inside damaged data cannot hide the good frame behind it.
 */
import { type FrameHandler, type Framer, VERDICT } from "./framing.ts";
import type { LinkCounters } from "./packets.ts";

export interface LengthRule {
  /** What every frame begins with; empty where only the checksum tells. */
  readonly sync: Uint8Array;
  /** Bytes that must be there before `frameBytes` can tell the length; at least the sync word and 1. */
  readonly headBytes: number;
  /** All bytes of the frame whose head is in the buffer; any number when the head is damaged. */
  readonly frameBytes: (buffer: Uint8Array) => number;
  readonly maxBytes: number;
}

/** Receiving the head: sync word, and the length where one is sent. */
const IN_HEAD = 0;
/** The length is known: receiving the rest. */
const IN_FRAME = 1;

export class LengthFramer implements Framer {
  readonly buffer: Uint8Array;
  readonly #rule: LengthRule;
  readonly #counters: LinkCounters;
  readonly #onFrame: FrameHandler;
  #state = IN_HEAD;
  /** Bytes in the buffer; they begin where a frame may begin. */
  #have = 0;
  /** Bytes needed before anything can be decided. */
  #need: number;
  /** The bytes just before the buffer's were an intact frame. */
  #aligned = false;

  constructor(rule: LengthRule, counters: LinkCounters, onFrame: FrameHandler) {
    this.buffer = new Uint8Array(rule.maxBytes);
    this.#rule = rule;
    this.#counters = counters;
    this.#onFrame = onFrame;
    this.#need = rule.headBytes;
  }

  push(chunk: Uint8Array): void {
    for (let i = 0; i < chunk.length; i++) {
      this.buffer[this.#have++] = chunk[i];
      while (this.#have >= this.#need) {
        if (this.#state === IN_HEAD) this.#head();
        else this.#frame();
      }
    }
  }

  #head(): void {
    const { sync, headBytes, maxBytes, frameBytes } = this.#rule;
    for (let i = 0; i < sync.length; i++) {
      if (this.buffer[i] !== sync[i]) {
        this.#falseStart();
        return;
      }
    }
    const length = frameBytes(this.buffer);
    if (length > maxBytes) this.#counters.overLong++;
    if (length > maxBytes || length < headBytes) {
      this.#falseStart();
      return;
    }
    this.#need = length;
    this.#state = IN_FRAME;
  }

  #frame(): void {
    const verdict = this.#onFrame(this.#need);
    if (verdict === VERDICT.BROKEN) {
      // Without a sync word every byte is a start to be tried; only the first after a good frame is a frame gone bad.
      if (this.#aligned || this.#rule.sync.length > 0) this.#counters.badChecksum++;
      this.#falseStart();
      return;
    }
    if (verdict === VERDICT.REFUSED) this.#counters.discardedBytes += this.#need;
    this.#aligned = true;
    this.#dropTo(this.#need);
  }

  /** Goes on at the next place that may be a start: the next byte, or the next one equal to the first of the sync word. */
  #falseStart(): void {
    const first = this.#rule.sync[0];
    let at = 1;
    while (first !== undefined && at < this.#have && this.buffer[at] !== first) at++;
    this.#counters.discardedBytes += at;
    this.#aligned = false;
    this.#dropTo(at);
  }

  #dropTo(at: number): void {
    this.buffer.copyWithin(0, at, this.#have);
    this.#have -= at;
    this.#need = this.#rule.headBytes;
    this.#state = IN_HEAD;
  }
}
