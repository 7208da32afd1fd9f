/** A real pseudo-terminal that plays a serial port: what is written to it comes out of the port at `path`. */
import { closeSync, mkdtempSync, rmSync, symlinkSync, writeSync } from "node:fs";
import { createRequire } from "node:module";
import { tmpdir } from "node:os";
import { join } from "node:path";

// Of the package only its binding is used: its own `open` reads the port's end itself, and so would take bytes away.
const require = createRequire(import.meta.url);
const terminals: {
  /** Descriptors of the hub's end and the port's end, and the path that opens the latter. */
  open(
    columns: number,
    rows: number,
  ): { readonly master: number; readonly slave: number; readonly pty: string };
} = require("@lydell/node-pty/requireBinary.js").requireBinary("pty.node");

export interface Pty {
  /** Stays the same when the port is plugged in again: a link to the terminal of the moment. */
  readonly path: string;
  /**
   * Resolves when the system has taken all bytes, which waits for a reader while its buffers are full. Whoever opens the
   * port switches the terminal to raw mode, and empties the buffers.
   */
  write(bytes: Uint8Array | string): Promise<void>;
  /** As when the cable is pulled: the port vanishes under whoever has it open. */
  unplug(): void;
  /** A new terminal under the same path. */
  plugIn(): void;
  /** Unplugs, and removes the link's folder. */
  close(): void;
}

export async function openPty(): Promise<Pty> {
  const folder = mkdtempSync(join(tmpdir(), "bendwatch-pty-"));
  const path = join(folder, "port");
  let hub: number | null = null;

  const pty: Pty = {
    path,
    async write(bytes) {
      let rest = Buffer.from(bytes);
      while (rest.length > 0) {
        if (hub === null) throw new Error("written to while unplugged");
        rest = rest.subarray(writeWhatFits(hub, rest));
        if (rest.length > 0) await new Promise((resolve) => setImmediate(resolve));
      }
    },
    unplug() {
      if (hub === null) return;
      closeSync(hub);
      rmSync(path);
      hub = null;
    },
    plugIn() {
      const terminal = terminals.open(80, 24);
      closeSync(terminal.slave);
      hub = terminal.master;
      symlinkSync(terminal.pty, path);
    },
    close() {
      pty.unplug();
      rmSync(folder, { recursive: true });
    },
  };
  pty.plugIn();
  return pty;
}

/** @returns bytes taken; 0 when the system's buffers are full */
function writeWhatFits(descriptor: number, bytes: Uint8Array): number {
  try {
    return writeSync(descriptor, bytes);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === "EAGAIN") return 0;
    throw error;
  }
}
