/**
 * Reads packets.cborseq record by record through a window of fixed size. A tail cut off by a crash and damage are
 * reported, after everything before them was delivered: a CBOR sequence has no marks to find the next record by, so
 * nothing after damage can be trusted.
 */
import { closeSync, fstatSync, openSync, readSync } from "node:fs";
import { join } from "node:path";
import { BendwatchError } from "../errors.ts";
import { PACKETS_FILE } from "./manifest.ts";
import { decodeRecord, itemEnd, MAX_RECORD_BYTES, type TrialRecord } from "./records.ts";

/** Room for several of the longest records, so that few of them straddle a refill. */
const WINDOW_BYTES = 4 * MAX_RECORD_BYTES;

/** How the reading ended. complete: at a record's end. truncated: within a record. damaged: at bytes that are no record. */
export interface ReadEnd {
  readonly kind: "complete" | "truncated" | "damaged";
  /** Where the records that could be read end, in the file. */
  readonly offset: number;
  /** Bytes from there to the end of the file. */
  readonly unreadBytes: number;
}

export class TrialReader {
  /** How the reading ended; null before. */
  end: ReadEnd | null = null;
  readonly #file: number;
  readonly #window = new Uint8Array(WINDOW_BYTES);
  /** Offset in the file of the window's first byte. */
  #base = 0;
  #at = 0;
  #filled = 0;

  /** @throws BendwatchError TRIAL_UNREADABLE when the file cannot be opened */
  constructor(folder: string) {
    const path = join(folder, PACKETS_FILE);
    try {
      this.#file = openSync(path, "r");
    } catch (cause) {
      throw new BendwatchError(
        "TRIAL_UNREADABLE",
        { where: path, found: (cause as Error).message, expected: "the packets of a trial" },
        { cause },
      );
    }
  }

  /** Offset in the file of the next record. */
  get offset(): number {
    return this.#base + this.#at;
  }

  /** The next record, which is the caller's to keep; null at the end, and then `end` says which. */
  next(): TrialRecord | null {
    if (this.end !== null) return null;
    let recordEnd = itemEnd(this.#window, this.#at, this.#filled);
    if (recordEnd === -1) {
      this.#refill();
      recordEnd = itemEnd(this.#window, this.#at, this.#filled);
    }
    if (recordEnd === -1 && this.#filled - this.#at < WINDOW_BYTES) {
      return this.#finish(this.#at === this.#filled ? "complete" : "truncated");
    }
    if (recordEnd < 0) return this.#finish("damaged");
    const record = decodeRecord(this.#window.subarray(this.#at, recordEnd));
    if (record === null) return this.#finish("damaged");
    this.#at = recordEnd;
    return record;
  }

  /** Closes the file. */
  close(): void {
    closeSync(this.#file);
  }

  /** Moves what is left to the window's start and reads on until the window is full or the file ends. */
  #refill(): void {
    this.#window.copyWithin(0, this.#at, this.#filled);
    this.#base += this.#at;
    this.#filled -= this.#at;
    this.#at = 0;
    while (this.#filled < WINDOW_BYTES) {
      const read = readSync(
        this.#file,
        this.#window,
        this.#filled,
        WINDOW_BYTES - this.#filled,
        this.#base + this.#filled,
      );
      if (read === 0) return;
      this.#filled += read;
    }
  }

  #finish(kind: ReadEnd["kind"]): null {
    this.end = { kind, offset: this.offset, unreadBytes: fstatSync(this.#file).size - this.offset };
    return null;
  }
}
