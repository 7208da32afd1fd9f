/** What faults of one unit do: near it, to how it sits, within it, and to its plug. */
import { ACCEL, CHANNELS, GYRO, MAG } from "../sweep.ts";
import { turnAboutX, turnAboutZ } from "./attitude.ts";
import { DELIVERY, type MakeEffect } from "./effect.ts";
import { addScaled, during, ramp } from "./fault-times.ts";
import type { Fault, SensorFaultKind } from "./faults.ts";

/** A magnet of a few grams at a hand's breadth: tens of µT, common practice. */
const MAGNET_UT = [27, -22, 28];
const FIELD_RAMP_S = 0.3;
/** A steel plate under two units. */
const PLATE_UT = [18, -14, 16];
/** A small motor's field, and its turns a second. */
const MOTOR_UT = [9, -7, 6];
const MOTOR_HZ = 37;

/** A rattle that a hand could give; its peak rate is set beyond the gyro's range. */
const RATTLE_HZ = 8;
const RATTLE_PEAK_SHARE = 1.5;
const RATTLE_RAMP_S = 0.25;

/** A patch that lets go: how far the unit turns about the body's long axis, rad, and how fast. */
const SLIP = 0.6;
const SLIP_S = 0.3;

/** Share of the motion's own peak at which a flat-topped gyro limits, seen over this long, and the least limit, rad/s. */
const FLATTOP_SHARE = 0.6;
const FLATTOP_LOOK_S = 2;
const FLATTOP_LEAST = 0.1;

/** Noise times the model's; offset times the data sheet's largest; gain of accelerometer and magnetometer. */
const NOISY_FACTOR = 6;
const OFFSET_FACTOR = 4;
const HEAVY_GAIN = 1.08;
const FIELD_GAIN = 1.08;

/** A loose connector: how long contact is lost and held, s. */
const LOOSE_LOST_S = [0.02, 0.15] as const;
const LOOSE_HELD_S = [0.05, 0.3] as const;

export const SENSOR_EFFECTS: Record<SensorFaultKind, MakeEffect> = {
  magnet: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return { disturb: (timeS, felt) => addScaled(felt, MAG, MAGNET_UT, strength(timeS).value) };
  },

  plate: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return { units: 2, disturb: (timeS, felt) => addScaled(felt, MAG, PLATE_UT, strength(timeS).value) };
  },

  motor: (fault) => {
    const strength = ramp(fault, FIELD_RAMP_S);
    return {
      disturb: (timeS, felt) =>
        addScaled(felt, MAG, MOTOR_UT, strength(timeS).value * Math.sin(2 * Math.PI * MOTOR_HZ * timeS)),
    };
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

  noisy: (fault, { sensors, random }) => {
    const { gyro, accel } = sensors[fault.sensor];
    const added = Math.sqrt(NOISY_FACTOR ** 2 - 1);
    return {
      spoil: (timeS, raw, at) => {
        if (!during(fault, timeS)) return;
        for (let k = 0; k < MAG; k++) {
          raw[at + k] += added * (k < ACCEL ? gyro : accel).noise * random.normal();
        }
      },
    };
  },

  offset: (fault, { sensors }) => {
    const offset = OFFSET_FACTOR * sensors[fault.sensor].gyro.biasLimit;
    return {
      spoil: (timeS, raw, at) => {
        if (during(fault, timeS)) raw[at + GYRO + 2] += offset;
      },
    };
  },

  heavy: (fault) => ({ spoil: (timeS, raw, at) => gain(fault, timeS, raw, at + ACCEL, HEAVY_GAIN) }),

  strong: (fault) => ({ spoil: (timeS, raw, at) => gain(fault, timeS, raw, at + MAG, FIELD_GAIN) }),

  slipped: (fault) => {
    const strength = ramp(fault, SLIP_S);
    return {
      disturb: (timeS, felt) => {
        const { value, rate } = strength(timeS);
        // What a turned unit feels turns the other way.
        for (let part = 0; part < CHANNELS; part += 3) {
          const vector = felt.subarray(part, part + 3);
          turnAboutX(vector, -SLIP * value, vector);
        }
        felt[GYRO] += SLIP * rate;
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
};

/** Half a turn about a body axis changes the sign of the other two. */
function turnedByHalf(fault: Fault, timeS: number, felt: Float64Array, signs: readonly number[]): void {
  if (!during(fault, timeS)) return;
  for (let k = 0; k < felt.length; k++) felt[k] *= signs[k % 3];
}

function gain(fault: Fault, timeS: number, raw: Float64Array, at: number, factor: number): void {
  if (during(fault, timeS)) for (let k = at; k < at + 3; k++) raw[k] *= factor;
}
