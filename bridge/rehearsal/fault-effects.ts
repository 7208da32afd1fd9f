/**
 * What each fault does, at the place in the chain from the water to the wire where it would really happen: to the field,
 * to what the unit feels, to its reading, to what the hub gets from it, or to the bytes on the wire. Each effect has its
 * own random numbers, so that a fault changes nothing but what it says.
 */
import { ACCEL, GYRO, MAG } from "../sweep.ts";
import { turnAboutZ } from "./attitude.ts";
import type { Fault, FaultKind } from "./faults.ts";
import type { Random } from "./random.ts";
import type { NoisySensor } from "./sensor-noise.ts";
import { newJet, SteppedSignal } from "./signal.ts";

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
  /** Changes a packet's bytes on the wire. */
  damage?(timeS: number, frame: Uint8Array): void;
  /** Whether nothing is sent at all. */
  isDark?(timeS: number): boolean;
  /** When the hub counts from zero again, s. */
  readonly restartS?: number;
}

/** What an effect may need to know of the rig. */
export interface FaultContext {
  readonly random: Random;
  readonly sensors: readonly NoisySensor[];
  /** The largest angular rate of a sensor about any body axis between two moments, rad/s. */
  peakRate(sensor: number, fromS: number, toS: number): number;
}

/** A magnet of a few grams at a hand's breadth, and a steel carriage at arm's length: tens of µT, common practice. */
const MAGNET_UT = [27, -22, 28];
const STEEL_UT = [16, -9, -12];
const FIELD_RAMP_S = 0.3;

/** A rattle that a hand could give; its peak rate is set beyond the gyro's range. */
const RATTLE_HZ = 8;
const RATTLE_PEAK_SHARE = 1.5;
const RATTLE_RAMP_S = 0.25;

/** Share of the motion's own peak at which a flat-topped gyro limits, seen over this long, and the least limit, rad/s. */
const FLATTOP_SHARE = 0.6;
const FLATTOP_LOOK_S = 2;
const FLATTOP_LEAST = 0.1;

/** A loose connector: how long contact is lost and held, s. */
const LOOSE_LOST_S = [0.02, 0.15] as const;
const LOOSE_HELD_S = [0.05, 0.3] as const;

const LOSS_SHARE = 0.1;
const CORRUPT_SHARE = 0.2;
const MOST_FLIPPED_BITS = 3;

type Make = (fault: Fault, context: FaultContext) => FaultEffect;

const EFFECTS: Record<FaultKind, Make> = {
  magnet: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return { disturb: (timeS, felt) => addScaled(felt, MAG, MAGNET_UT, strength(timeS).value) };
  },

  field: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return { addField: (timeS, field) => addScaled(field, 0, STEEL_UT, strength(timeS).value) };
  },

  saturation: (fault, { sensors }) => {
    const { scale, fullCounts } = sensors[fault.sensor].gyro;
    const omega = 2 * Math.PI * RATTLE_HZ;
    const swing = (RATTLE_PEAK_SHARE * scale * fullCounts) / omega;
    const strength = ramp(fault, RATTLE_RAMP_S);
    return {
      disturb: (timeS, felt) => {
        const { value, rate } = strength(timeS);
        const sine = swing * Math.sin(omega * timeS);
        // The unit turns by this angle about the body's z axis, so what it feels turns the other way.
        for (const part of [GYRO, ACCEL, MAG]) {
          const vector = felt.subarray(part, part + 3);
          turnAboutZ(vector, -value * sine, vector);
        }
        felt[GYRO + 2] += rate * sine + value * omega * swing * Math.cos(omega * timeS);
      },
    };
  },

  flattop: (fault, { sensors, peakRate }) => {
    const { scale } = sensors[fault.sensor].gyro;
    const peak = peakRate(fault.sensor, fault.startS, fault.startS + FLATTOP_LOOK_S);
    const limit = scale * Math.round(Math.max(FLATTOP_LEAST, FLATTOP_SHARE * peak) / scale);
    return {
      spoil: (timeS, raw, at) => {
        if (!during(fault, timeS)) return;
        for (let i = at + GYRO; i < at + GYRO + 3; i++) raw[i] = Math.min(limit, Math.max(-limit, raw[i]));
      },
    };
  },

  stuck: (fault) => {
    let held = Number.NaN;
    return {
      spoil: (timeS, raw, at) => {
        if (!during(fault, timeS)) return;
        if (Number.isNaN(held)) held = raw[at + fault.axis];
        raw[at + fault.axis] = held;
      },
    };
  },

  upended: (fault) => ({ disturb: (timeS, felt) => turnedByHalf(fault, timeS, felt, [1, -1, -1]) }),

  backward: (fault) => ({ disturb: (timeS, felt) => turnedByHalf(fault, timeS, felt, [-1, -1, 1]) }),

  swapped: (fault) => ({ isSwapped: (timeS) => during(fault, timeS) }),

  loose: (fault, { random }) => {
    let held = true;
    let changesS = fault.startS + random.between(...LOOSE_HELD_S);
    return {
      delivery: (timeS) => {
        if (!during(fault, timeS)) return DELIVERY.WHOLE;
        while (timeS >= changesS) {
          held = !held;
          changesS += held ? random.between(...LOOSE_HELD_S) : random.between(...LOOSE_LOST_S);
        }
        return held ? DELIVERY.WHOLE : DELIVERY.ABSENT;
      },
    };
  },

  unreadable: (fault) => ({
    delivery: (timeS) => (during(fault, timeS) ? DELIVERY.UNREADABLE : DELIVERY.WHOLE),
  }),

  loss: (fault, { random }) => ({
    losesSweep: (timeS) => during(fault, timeS) && random.uniform() < LOSS_SHARE,
  }),

  burst: (fault) => ({ losesSweep: (timeS) => during(fault, timeS) }),

  corrupt: (fault, { random }) => ({
    damage: (timeS, frame) => {
      if (!during(fault, timeS) || random.uniform() >= CORRUPT_SHARE) return;
      const flips = 1 + Math.floor(random.between(0, MOST_FLIPPED_BITS));
      for (let i = 0; i < flips; i++) {
        const bit = Math.floor(random.between(0, 8 * frame.length));
        frame[bit >> 3] ^= 1 << (bit & 7);
      }
    },
  }),

  silence: (fault) => ({ isDark: (timeS) => during(fault, timeS) }),

  restart: (fault) => ({ isDark: (timeS) => during(fault, timeS), restartS: fault.endS }),
};

/** The effect of one fault; make one anew for each run. */
export function effectOf(fault: Fault, context: FaultContext): FaultEffect {
  return EFFECTS[fault.kind](fault, context);
}

function during({ startS, endS }: Fault, timeS: number): boolean {
  return timeS >= startS && timeS < endS;
}

/** A strength that rises from 0 to 1 within `rampS` of the start and falls back from the end. */
function ramp({ startS, endS }: Fault, rampS: number) {
  const signal = new SteppedSignal(0, [
    { atS: startS, overS: rampS, to: 1 },
    { atS: endS, overS: rampS, to: 0 },
  ]);
  const jet = newJet();
  return (timeS: number) => {
    jet.value = 0;
    jet.rate = 0;
    jet.acceleration = 0;
    signal.addTo(jet, timeS);
    return jet;
  };
}

/** Half a turn about a body axis changes the sign of the other two. */
function turnedByHalf(fault: Fault, timeS: number, felt: Float64Array, signs: readonly number[]): void {
  if (!during(fault, timeS)) return;
  for (let k = 0; k < felt.length; k++) felt[k] *= signs[k % 3];
}

function addScaled(out: Float64Array, at: number, vector: readonly number[], factor: number): void {
  for (let axis = 0; axis < 3; axis++) out[at + axis] += factor * vector[axis];
}
