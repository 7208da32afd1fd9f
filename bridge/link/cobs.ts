/**
 * COBS, consistent overhead byte stuffing: S. Cheshire, M. Baker, IEEE/ACM Transactions on Networking 7(2), 1999.
 *
 *     code  data ...         code  data ...              0x00
 *      n    n-1 bytes, none zero, then one zero implied   delimiter
 *     255   254 bytes, none zero, no zero implied
 *
 * The zero implied by the last block is not part of the data.
 */
import { countFrame, type FrameHandler, type Framer, VERDICT } from "./framing.ts";
import type { LinkCounters } from "./packets.ts";

const DELIMITER = 0;
const FULL_BLOCK = 255;

/** Between blocks, where a code or the delimiter comes. */
const AT_CODE = 0;
/** Inside a block. */
const IN_BLOCK = 1;
/** Over-long: waiting for the delimiter. */
const SKIPPING = 2;

/** Takes COBS frames ended by 0x00 apart. A delimiter alone is ignored. */
export class CobsFramer implements Framer {
  readonly buffer: Uint8Array;
  readonly #counters: LinkCounters;
  readonly #onFrame: FrameHandler;
  #state = AT_CODE;
  /** Decoded bytes in the buffer. */
  #length = 0;
  /** Bytes of this frame as received. */
  #rawBytes = 0;
  /** Bytes the present block still has. */
  #blockLeft = 0;
  /** Code of the block before; FULL_BLOCK also before the first, since both imply no zero. */
  #code = FULL_BLOCK;

  /** @param maxBytes longest legal frame, decoded */
  constructor(maxBytes: number, counters: LinkCounters, onFrame: FrameHandler) {
    this.buffer = new Uint8Array(maxBytes);
    this.#counters = counters;
    this.#onFrame = onFrame;
  }

  push(chunk: Uint8Array): void {
    for (let i = 0; i < chunk.length; i++) {
      const byte = chunk[i];
      if (byte === DELIMITER) this.#end();
      else if (this.#state === IN_BLOCK) this.#data(byte);
      else if (this.#state === AT_CODE) this.#block(byte);
      else this.#counters.discardedBytes++;
    }
  }

  #block(code: number): void {
    this.#rawBytes++;
    if (this.#code !== FULL_BLOCK && !this.#append(DELIMITER)) return;
    this.#code = code;
    this.#blockLeft = code - 1;
    if (this.#blockLeft > 0) this.#state = IN_BLOCK;
  }

  #data(byte: number): void {
    this.#rawBytes++;
    if (!this.#append(byte)) return;
    if (--this.#blockLeft === 0) this.#state = AT_CODE;
  }

  #append(byte: number): boolean {
    if (this.#length < this.buffer.length) {
      this.buffer[this.#length++] = byte;
      return true;
    }
    this.#counters.overLong++;
    this.#counters.discardedBytes += this.#rawBytes;
    this.#state = SKIPPING;
    return false;
  }

  #end(): void {
    if (this.#state === SKIPPING) {
      this.#counters.discardedBytes++;
    } else if (this.#state === IN_BLOCK) {
      countFrame(this.#counters, VERDICT.BROKEN, this.#rawBytes + 1);
    } else if (this.#rawBytes > 0) {
      countFrame(this.#counters, this.#onFrame(this.#length), this.#rawBytes + 1);
    }
    this.#state = AT_CODE;
    this.#length = 0;
    this.#rawBytes = 0;
    this.#code = FULL_BLOCK;
  }
}

/** Longest coded frame for `length` bytes of data, delimiter included. */
export function cobsEncodedBytes(length: number): number {
  return length + Math.floor(length / 254) + 2;
}

/**
 * Encodes data[0 .. length) and ends it with 0x00.
 * @param out at least cobsEncodedBytes(length) long; must not overlap `data`
 * @returns bytes written
 */
export function encodeCobs(data: Uint8Array, length: number, out: Uint8Array): number {
  let codeAt = 0;
  let at = 1;
  for (let i = 0; i < length; i++) {
    const byte = data[i];
    if (byte !== DELIMITER) out[at++] = byte;
    const code = at - codeAt;
    // A full block at the very end implies no zero, so none follows it.
    if (byte === DELIMITER || (code === FULL_BLOCK && i + 1 < length)) {
      out[codeAt] = code;
      codeAt = at++;
    }
  }
  out[codeAt] = at - codeAt;
  out[at++] = DELIMITER;
  return at;
}
