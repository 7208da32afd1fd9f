/** The hub's port: a small buffer that empties byte by byte at the baud rate. Packets that do not fit are lost, as on a real hub. */

/** Bits on the wire for one byte: start, eight data, stop. */
const BITS_PER_BYTE = 10;
const BUFFER_BYTES = 16_384;

export class OutPort {
  readonly #bytesPerS: number;
  readonly #held = new Uint8Array(BUFFER_BYTES);
  #heldCount = 0;
  readonly #sent = new Uint8Array(BUFFER_BYTES);
  #sentCount = 0;
  /** When the byte that left last had left, s. */
  #lineFreeS = 0;

  constructor(baudRate: number) {
    this.#bytesPerS = baudRate / BITS_PER_BYTE;
  }

  /** Takes a packet at `timeS`, which never runs backwards; false when it does not fit. */
  put(timeS: number, packet: Uint8Array): boolean {
    this.#carry(timeS);
    if (this.#heldCount + packet.length > BUFFER_BYTES) return false;
    if (this.#heldCount === 0) this.#lineFreeS = Math.max(this.#lineFreeS, timeS);
    this.#held.set(packet, this.#heldCount);
    this.#heldCount += packet.length;
    return true;
  }

  /** The bytes that have left by `timeS` since the last call. Borrowed: valid until the next call of either method. */
  take(timeS: number): Uint8Array {
    this.#carry(timeS);
    const count = this.#sentCount;
    this.#sentCount = 0;
    return this.#sent.subarray(0, count);
  }

  #carry(timeS: number): void {
    const due = Math.floor((timeS - this.#lineFreeS) * this.#bytesPerS);
    const count = Math.min(Math.max(0, due), this.#heldCount, BUFFER_BYTES - this.#sentCount);
    this.#sent.set(this.#held.subarray(0, count), this.#sentCount);
    this.#held.copyWithin(0, count, this.#heldCount);
    this.#sentCount += count;
    this.#heldCount -= count;
    this.#lineFreeS += count / this.#bytesPerS;
  }
}
