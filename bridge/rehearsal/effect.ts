/** What an effect of a fault is: the places in the chain from the water to the wire where it can act. */
import type { HubStatus } from "../link/packets.ts";
import type { Fault } from "./faults.ts";
import type { Random } from "./random.ts";
import type { NoisySensor } from "./sensor-noise.ts";

/** What the hub got from a unit in a sweep. */
export const DELIVERY = { WHOLE: 0, ABSENT: 1, UNREADABLE: 2 } as const;

/** The places where a fault can act; each effect has those it needs. `timeS` never runs backwards. */
export interface FaultEffect {
  /** Adds to the field at all units, µT, earth axes. */
  addField?(timeS: number, field: Float64Array): void;
  /** Changes what the unit feels: 9 numbers, body axes. */
  disturb?(timeS: number, felt: Float64Array): void;
  /** Changes the unit's reading: 9 numbers at `at`, its own axes. */
  spoil?(timeS: number, raw: Float64Array, at: number): void;
  /** Whether the unit's place in the packets is exchanged with the next one's. */
  isSwapped?(timeS: number): boolean;
  /** What the hub gets from the unit. */
  delivery?(timeS: number): number;
  /** Whether this sweep is lost on the way. */
  losesSweep?(timeS: number): boolean;
  /** Whether this sweep is sent a second time. */
  repeatsSweep?(timeS: number): boolean;
  /** How many sweeps overtake this one on the way. */
  sweepsAhead?(timeS: number): number;
  /** How far the hub's counter runs ahead of time, s. */
  tickAheadS?(timeS: number): number;
  /** Changes what the hub says of itself. */
  changeStatus?(timeS: number, status: HubStatus): void;
  /** Changes a packet's bytes on the wire. */
  damage?(timeS: number, frame: Uint8Array): void;
  /** Whether nothing is sent at all. */
  isDark?(timeS: number): boolean;
  /** When the hub counts from zero again, s. */
  readonly restartS?: number;
  /** Units concerned, from the fault's own towards the tail; one unless given. */
  readonly units?: number;
}

/** What an effect may need to know of the rig. */
export interface FaultContext {
  readonly random: Random;
  readonly sensors: readonly NoisySensor[];
  /** The largest angular rate of a sensor about any body axis between two moments, rad/s. */
  peakRate(sensor: number, fromS: number, toS: number): number;
}

/** Makes the effect of a fault anew for a run. */
export type MakeEffect = (fault: Fault, context: FaultContext) => FaultEffect;
