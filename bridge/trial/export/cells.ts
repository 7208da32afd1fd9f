/**
 * Writes the cells of a CSV table (RFC 4180: commas, CRLF, quotes doubled) into a buffer. Numbers have a fixed count of
 * decimals, so the same values give the same bytes everywhere; not-a-number is an empty cell.
 */

const COMMA = 0x2c;
const MINUS = 0x2d;
const POINT = 0x2e;
const ZERO = 0x30;
/** 10^0 to 10^9, exact. */
const POWERS = Array.from({ length: 10 }, (_, i) => 10 ** i);
/** Beyond this an integer no longer holds every digit; such numbers are left to toFixed. */
const EXACT = 2 ** 52;
/** Longest number written: sign, 16 digits, point, and leading zeros; toFixed gives up to 21 digits and decimals. */
const NUMBER_BYTES = 40;

export class CellWriter {
  #bytes: Buffer;
  #length = 0;
  #rowStarted = false;

  constructor(initialBytes: number) {
    this.#bytes = Buffer.allocUnsafe(initialBytes);
  }

  get length(): number {
    return this.#length;
  }

  /** A number with `decimals` places (at most 9), rounded half away from zero. Never "-0". */
  number(value: number, decimals: number): void {
    this.#startCell(NUMBER_BYTES);
    const scaled = Math.round(Math.abs(value) * POWERS[decimals]!);
    if (scaled < EXACT) this.#digits(scaled, decimals, value < 0 && scaled > 0);
    else if (Number.isFinite(value)) this.#length += this.#bytes.write(value.toFixed(decimals), this.#length);
  }

  /**
   * A text. One that a spreadsheet would take for a formula (it starts with = + - @, tab or carriage return) gets an
   * apostrophe in front, as OWASP recommends against "CSV injection".
   */
  text(value: string): void {
    const safe = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
    const cell = /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
    this.#startCell(3 * cell.length);
    this.#length += this.#bytes.write(cell, this.#length);
  }

  endRow(): void {
    this.#reserve(2);
    this.#bytes[this.#length++] = 0x0d;
    this.#bytes[this.#length++] = 0x0a;
    this.#rowStarted = false;
  }

  /** What was written since the last call; borrowed until the next cell is written. */
  take(): Uint8Array {
    const taken = this.#bytes.subarray(0, this.#length);
    this.#length = 0;
    return taken;
  }

  #startCell(bytes: number): void {
    this.#reserve(bytes + 1);
    if (this.#rowStarted) this.#bytes[this.#length++] = COMMA;
    this.#rowStarted = true;
  }

  #reserve(bytes: number): void {
    if (this.#length + bytes <= this.#bytes.length) return;
    const larger = Buffer.allocUnsafe(2 * (this.#length + bytes));
    this.#bytes.copy(larger, 0, 0, this.#length);
    this.#bytes = larger;
  }

  /** A whole number, the last `decimals` digits of it behind the point. */
  #digits(scaled: number, decimals: number, negative: boolean): void {
    const bytes = this.#bytes;
    let places = decimals + 1;
    for (let limit = 10 * POWERS[decimals]!; scaled >= limit; limit *= 10) places++;
    if (negative) bytes[this.#length++] = MINUS;
    const end = this.#length + places + (decimals > 0 ? 1 : 0);
    const point = decimals > 0 ? end - 1 - decimals : -1;
    let rest = scaled;
    for (let at = end - 1; at >= this.#length; at--) {
      if (at === point) {
        bytes[at] = POINT;
        continue;
      }
      const shorter = Math.floor(rest / 10);
      bytes[at] = ZERO + (rest - shorter * 10);
      rest = shorter;
    }
    this.#length = end;
  }
}
