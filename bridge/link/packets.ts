/** What a hub says besides sweeps, and the interface of all packet decoders. */
import type { Sweep } from "../sweep.ts";

/** Kinds of hub packets, as numbered in the native layout. */
export const PACKET_KIND = { HELLO: 1, SWEEP: 2, STATUS: 3, REFERENCE: 4, SYNC: 5, BUTTON: 6 } as const;

/** The hub introduces itself, about once a second: how many sensors, how fast, and what one count means. */
export interface HubHello {
  tickUs: number;
  rateHz: number;
  hubSerial: string;
  sensors: HubSensor[];
}

export interface HubSensor {
  /** rad/s, m/s² and µT for one count; 0 where the sensor has no such part. */
  gyroScale: number;
  accelScale: number;
  magScale: number;
  serial: string;
}

/** Slow housekeeping. A declared layout may lack either number: NaN then. */
export interface HubStatus {
  tickUs: number;
  supplyV: number;
  temperatureC: number;
  /** Bits: 1 supply low, 2 sensor bus error, 4 buffer overrun, 8 restarted by watchdog. */
  faults: number;
}

/** The drive's own angle and sway. A declared layout may lack either: NaN then. */
export interface HubReference {
  tickUs: number;
  /** rad, positive turning left. */
  yaw: number;
  /** m, positive to the left. */
  sway: number;
}

/** A camera frame pulse. */
export interface SyncEdge {
  tickUs: number;
  /** Counts edges since the hub started. */
  edge: number;
}

export interface ButtonPress {
  tickUs: number;
  button: number;
}

/** All records handed over are borrowed: one object of each kind is reused. */
export interface PacketSink {
  sweep(sweep: Sweep): void;
  hello(hello: HubHello): void;
  status(status: HubStatus): void;
  reference(reference: HubReference): void;
  sync(edge: SyncEdge): void;
  button(press: ButtonPress): void;
}

/** Counts since the decoder was made. Nothing bad is ever passed on. */
export interface LinkCounters {
  bytes: number;
  /** Packets accepted, all kinds. */
  good: number;
  /** Frames whose checksum or COBS/SLIP coding was wrong. */
  badChecksum: number;
  /** Frames longer than the layout allows. */
  overLong: number;
  /** Frames intact but not understood: unknown version or kind, wrong length, wrong sensor count. */
  notUnderstood: number;
  /** Sweeps received before the hello that gives their scale. */
  awaitingHello: number;
  /** Bytes that belonged to no good packet. */
  discardedBytes: number;
}

export interface PacketDecoder {
  /**
   * Decodes a chunk of any size; calls the sink for each complete packet. Never throws on any input.
   * Sets sweep.hostTimeMs to the chunk's arrival.
   */
  push(chunk: Uint8Array, hostTimeMs: number): void;
  readonly counters: Readonly<LinkCounters>;
  /**
   * One sentence for the operator while what comes is intact but does not fit the rig (another number of sensors, another
   * protocol version); null while it fits.
   */
  readonly complaint: string | null;
}

export function emptyCounters(): LinkCounters {
  return {
    bytes: 0,
    good: 0,
    badChecksum: 0,
    overLong: 0,
    notUnderstood: 0,
    awaitingHello: 0,
    discardedBytes: 0,
  };
}
