/** One CSV table on the disk, written row by row through a buffer, counted and hashed on the way. */
import { createHash } from "node:crypto";
import { closeSync, openSync, writeSync } from "node:fs";
import { join } from "node:path";
import { BendwatchError } from "../../errors.ts";
import { CellWriter } from "./cells.ts";
import type { Table } from "./tables.ts";

/** Written to the disk in pieces of about this size. */
const PIECE_BYTES = 256 * 1024;

export interface WrittenFile {
  readonly table: Table;
  readonly path: string;
  readonly bytes: number;
  readonly sha256: string;
}

export class TableFile {
  readonly cells = new CellWriter(PIECE_BYTES + 16_384);
  readonly #table: Table;
  readonly #path: string;
  readonly #file: number;
  readonly #hash = createHash("sha256");
  #bytes = 0;

  /** Creates the file, over an older one, and writes the header. @throws BendwatchError EXPORT_FAILED */
  constructor(folder: string, table: Table) {
    this.#table = table;
    this.#path = join(folder, `${table.name}.csv`);
    this.#file = attempt(this.#path, () => openSync(this.#path, "w"));
    for (const column of table.columns) this.cells.text(column.name);
    this.endRow();
  }

  /** Ends the row whose cells were written. @throws BendwatchError EXPORT_FAILED */
  endRow(): void {
    this.cells.endRow();
    if (this.cells.length >= PIECE_BYTES) this.#flush();
  }

  /** Writes the rest and closes. @throws BendwatchError EXPORT_FAILED */
  finish(): WrittenFile {
    this.#flush();
    attempt(this.#path, () => closeSync(this.#file));
    return {
      table: this.#table,
      path: `${this.#table.name}.csv`,
      bytes: this.#bytes,
      sha256: this.#hash.digest("hex"),
    };
  }

  #flush(): void {
    const bytes = this.cells.take();
    this.#hash.update(bytes);
    this.#bytes += bytes.length;
    for (let at = 0; at < bytes.length; ) {
      at += attempt(this.#path, () => writeSync(this.#file, bytes, at));
    }
  }
}

/** Does something to a file of an export. @throws BendwatchError EXPORT_FAILED with the system's reason */
export function attempt<T>(path: string, action: () => T): T {
  try {
    return action();
  } catch (cause) {
    throw new BendwatchError(
      "EXPORT_FAILED",
      { where: path, found: (cause as Error).message, expected: "a file that can be written" },
      { cause },
    );
  }
}
