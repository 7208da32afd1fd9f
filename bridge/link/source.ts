/**
 * Where bytes come from. Serial port, recorded trial and rehearsal all implement ByteSource; nothing later can tell them
 * apart.
 */

import type { Choice } from "../wire/messages.ts";

/** opening: trying to open the port. open: bytes may come. closed: unplugged or shut, trying again. ended: no more will come. */
export type LinkState = "opening" | "open" | "closed" | "ended";

export interface ByteSink {
  /**
   * A chunk of bytes as it arrived. Borrowed: copy what must outlive the call.
   * @param hostTimeMs arrival on the host clock, ms since the epoch
   */
  bytes(chunk: Uint8Array, hostTimeMs: number): void;
  /** The link's state changed; `detail` is one sentence for the operator. */
  linkState(state: LinkState, detail: string, hostTimeMs: number): void;
  /** What the operator chose at this place of the trial that is replayed; of no use to a sink that only keeps bytes. */
  choice?(choice: Choice, hostTimeMs: number): void;
  /** A mark stored in the trial that is replayed. */
  mark(text: string, hostTimeMs: number): void;
}

export interface ByteSource {
  /** One line for screen and log: "serial /dev/ttyACM0", "trial healthy-demo", "rehearsal of Ribbon foil". */
  readonly label: string;
  readonly kind: "serial" | "trial" | "rehearsal";
  /** Delivers to `sink` until the source ends or `stop` is called; resolves then. Rejects only on what cannot be retried. */
  run(sink: ByteSink): Promise<void>;
  /** Ends `run` soon; resolves when everything is closed. */
  stop(): Promise<void>;
}
