/** For the tests of link/: a sink that keeps copies of all it is given, and bytes from hexadecimal text. */
import type { PacketSink } from "../../bridge/link/packets.ts";
import type { Sweep } from "../../bridge/sweep.ts";

export type Heard = readonly [kind: string, record: unknown];

export class Log implements PacketSink {
  readonly heard: Heard[] = [];

  sweep(sweep: Sweep): void {
    this.heard.push(["sweep", structuredClone(sweep)]);
  }
  hello(record: object): void {
    this.heard.push(["hello", structuredClone(record)]);
  }
  status(record: object): void {
    this.heard.push(["status", { ...record }]);
  }
  reference(record: object): void {
    this.heard.push(["reference", { ...record }]);
  }
  sync(record: object): void {
    this.heard.push(["sync", { ...record }]);
  }
  button(record: object): void {
    this.heard.push(["button", { ...record }]);
  }

  get sweeps(): Sweep[] {
    return this.heard.filter(([kind]) => kind === "sweep").map(([, record]) => record as Sweep);
  }
  get kinds(): string[] {
    return this.heard.map(([kind]) => kind);
  }
}

export function hex(text: string): Uint8Array {
  return Uint8Array.from(text.match(/[0-9a-f]{2}/gi) ?? [], (byte) => Number.parseInt(byte, 16));
}

export function join(...parts: readonly Uint8Array[]): Uint8Array {
  return new Uint8Array(Buffer.concat(parts));
}

/** Pushes `bytes` cut at the given places; every chunk arrives at host time 0. */
export function pushCut(
  decoder: { push(chunk: Uint8Array, hostTimeMs: number): void },
  bytes: Uint8Array,
  cuts: readonly number[],
): void {
  let from = 0;
  for (const cut of [...cuts.map((c) => c % (bytes.length + 1)).sort((a, b) => a - b), bytes.length]) {
    decoder.push(bytes.slice(from, cut), 0);
    from = cut;
  }
}
