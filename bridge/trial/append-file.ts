/**
 * A file that only grows. What is offered waits in memory, in order, until it is written; after a failed or partial
 * write the rest is kept and the next flush goes on exactly where the file stopped, so a record is never half there and
 * then written again.
 */
import { open } from "node:fs/promises";

/** What is needed of an open file; node's FileHandle fits. */
export interface AppendHandle {
  write(bytes: Uint8Array): Promise<{ readonly bytesWritten: number }>;
  datasync(): Promise<void>;
  close(): Promise<void>;
}

/** Creates a file for appending; fails when it exists. */
export type OpenAppend = (path: string) => Promise<AppendHandle>;

export const openAppend: OpenAppend = (path) => open(path, "ax");

export class AppendFile {
  /** Bytes in the file. */
  offset = 0;
  /** Bytes waiting in memory. */
  queuedBytes = 0;
  readonly #handle: AppendHandle;
  readonly #onWritten: (bytes: Uint8Array) => void;
  #queue: Uint8Array[] = [];
  #rest: Uint8Array = new Uint8Array(0);

  /** @param onWritten called with all bytes that reached the file, in order */
  constructor(handle: AppendHandle, onWritten: (bytes: Uint8Array) => void = () => {}) {
    this.#handle = handle;
    this.#onWritten = onWritten;
  }

  /** Queues bytes, which now belong to this file. */
  offer(bytes: Uint8Array): void {
    this.#queue.push(bytes);
    this.queuedBytes += bytes.length;
  }

  /** Queues one line of JSON. */
  offerLine(value: unknown): void {
    this.offer(Buffer.from(`${JSON.stringify(value)}\n`));
  }

  /** Writes all that was offered before the call. Rejects with the system's error, keeping what is not yet written. */
  async flush(): Promise<void> {
    if (this.queuedBytes === 0) return;
    this.#rest = Buffer.concat([this.#rest, ...this.#queue]);
    this.#queue = [];
    while (this.#rest.length > 0) {
      const { bytesWritten } = await this.#handle.write(this.#rest);
      if (bytesWritten === 0) throw new Error("the file takes no more bytes");
      this.#onWritten(this.#rest.subarray(0, bytesWritten));
      this.#rest = this.#rest.subarray(bytesWritten);
      this.offset += bytesWritten;
      this.queuedBytes -= bytesWritten;
    }
  }

  /** Has what was written put on the disk itself. */
  sync(): Promise<void> {
    return this.#handle.datasync();
  }

  close(): Promise<void> {
    return this.#handle.close();
  }
}
