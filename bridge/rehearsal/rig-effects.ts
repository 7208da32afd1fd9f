/** What faults of the whole rig do: around it, on the way of its packets, and to the hub itself. */
import type { MakeEffect } from "./effect.ts";
import { addScaled, during, ramp } from "./fault-times.ts";
import type { RigFaultKind } from "./faults.ts";

/** A steel carriage at arm's length: tens of µT, common practice. */
const STEEL_UT = [16, -9, -12];
const FIELD_RAMP_S = 0.3;
/** A cable that carries mains current along the tank, and where in its cycle the first sweep finds it, rad. */
const MAINS_UT = [8, 5, -6];
const MAINS_HZ = 50;
const MAINS_PHASE = 0.7;

const LOSS_SHARE = 0.1;
const CORRUPT_SHARE = 0.2;
const MOST_FLIPPED_BITS = 3;
const REPEATED_SHARE = 0.1;
const OVERTAKEN_SHARE = 0.1;
const OVERTAKEN_BY = 2;

const DRIFT_PPM = 600;

const SAGGING_V = 4.4;
const HOT_C = 68;
/** Fault bit in a status packet (as in link/packets.ts). */
const BUS_ERROR = 2;

export const RIG_EFFECTS: Record<RigFaultKind, MakeEffect> = {
  field: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return { addField: (timeS, field) => addScaled(field, 0, STEEL_UT, strength(timeS).value) };
  },

  mains: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return {
      addField: (timeS, field) => {
        const phase = 2 * Math.PI * MAINS_HZ * timeS + MAINS_PHASE;
        addScaled(field, 0, MAINS_UT, strength(timeS).value * Math.sin(phase));
      },
    };
  },

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

  repeated: (fault, { random }) => ({
    repeatsSweep: (timeS) => during(fault, timeS) && random.uniform() < REPEATED_SHARE,
  }),

  overtaken: (fault, { random }) => ({
    sweepsAhead: (timeS) => (during(fault, timeS) && random.uniform() < OVERTAKEN_SHARE ? OVERTAKEN_BY : 0),
  }),

  silence: (fault) => ({ isDark: (timeS) => during(fault, timeS) }),

  restart: (fault) => ({ isDark: (timeS) => during(fault, timeS), restartS: fault.endS }),

  drift: ({ startS, endS }) => ({
    tickAheadS: (timeS) => DRIFT_PPM * 1e-6 * Math.max(0, Math.min(timeS, endS) - startS),
  }),

  sag: (fault) => ({
    changeStatus: (timeS, status) => {
      if (during(fault, timeS)) status.supplyV = SAGGING_V;
    },
  }),

  hot: (fault) => ({
    changeStatus: (timeS, status) => {
      if (during(fault, timeS)) status.temperatureC = HOT_C;
    },
  }),

  bus: (fault) => ({
    changeStatus: (timeS, status) => {
      if (during(fault, timeS)) status.faults |= BUS_ERROR;
    },
  }),
};
