/** A ByteSink that keeps all it is given, and lets a test wait for it. */
import type { ByteSink, LinkState } from "../../bridge/link/source.ts";

export class ByteLog implements ByteSink {
  readonly states: LinkState[] = [];
  readonly details: string[] = [];
  readonly times: number[] = [];
  readonly #chunks: Uint8Array[] = [];
  #waiting: { met: () => boolean; resolve: () => void }[] = [];

  bytes(chunk: Uint8Array, hostTimeMs: number): void {
    this.#chunks.push(chunk.slice());
    this.times.push(hostTimeMs);
    this.#wake();
  }

  linkState(state: LinkState, detail: string, hostTimeMs: number): void {
    this.states.push(state);
    this.details.push(detail);
    this.times.push(hostTimeMs);
    this.#wake();
  }

  mark(): void {}

  /** All bytes so far. */
  get received(): Buffer {
    return Buffer.concat(this.#chunks);
  }

  /** Resolves as soon as `met` holds after something came. */
  until(met: (log: this) => boolean): Promise<void> {
    return new Promise((resolve) => {
      this.#waiting.push({ met: () => met(this), resolve });
      this.#wake();
    });
  }

  #wake(): void {
    this.#waiting = this.#waiting.filter(({ met, resolve }) => {
      if (!met()) return true;
      resolve();
      return false;
    });
  }
}
