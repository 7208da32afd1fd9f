/** Runs a rehearsal as fast as possible and keeps what a decoder makes of it. */
import { NativeDecoder } from "../../bridge/link/native-decoder.ts";
import type { HubHello, HubReference, HubStatus, LinkCounters, SyncEdge } from "../../bridge/link/packets.ts";
import { type RehearsalOptions, RehearsalSource } from "../../bridge/rehearsal/rehearsal-source.ts";

export interface KeptSweep {
  sequence: number;
  tickUs: number;
  hostTimeMs: number;
  raw: Float64Array;
  present: Uint8Array;
  readStatus: Uint8Array;
}

export interface Decoded {
  bytes: Uint8Array;
  chunks: number[];
  sweeps: KeptSweep[];
  hellos: HubHello[];
  statuses: HubStatus[];
  references: HubReference[];
  edges: SyncEdge[];
  states: string[];
  counters: Readonly<LinkCounters>;
  source: RehearsalSource;
}

export async function rehearse(options: RehearsalOptions): Promise<Decoded> {
  const source = new RehearsalSource({ rate: "max", startMs: 0, ...options });
  const parts: Uint8Array[] = [];
  const kept: Omit<Decoded, "bytes" | "counters" | "source" | "chunks"> = {
    sweeps: [],
    hellos: [],
    statuses: [],
    references: [],
    edges: [],
    states: [],
  };
  const decoder = new NativeDecoder(options.rig.sensors.length, {
    sweep: ({ sequence, tickUs, hostTimeMs, raw, present, readStatus }) =>
      kept.sweeps.push({
        sequence,
        tickUs,
        hostTimeMs,
        raw: raw.slice(),
        present: present.slice(),
        readStatus: readStatus.slice(),
      }),
    hello: (hello) => kept.hellos.push(structuredClone(hello)),
    status: (status) => kept.statuses.push({ ...status }),
    reference: (reference) => kept.references.push({ ...reference }),
    sync: (edge) => kept.edges.push({ ...edge }),
    button: () => {},
  });
  await source.run({
    bytes: (chunk, hostTimeMs) => {
      parts.push(chunk.slice());
      decoder.push(chunk, hostTimeMs);
    },
    linkState: (state) => kept.states.push(state),
    mark: () => {},
  });
  const chunks = parts.map((part) => part.length);
  return { ...kept, bytes: Buffer.concat(parts), chunks, counters: decoder.counters, source };
}
