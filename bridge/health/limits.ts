/** What a sensor model says about each part, in SI: its range, the size of one count and the noise of one reading. */
import { RAD_PER_DEG, STANDARD_GRAVITY } from "../numeric/units.ts";
import { ACCEL, CONDITION, GYRO, HAS_ACCEL, HAS_GYRO, HAS_MAG, MAG } from "../sweep.ts";
import type { HealthSensor } from "./setup.ts";

/** The three parts of a sensor, in the order of a sweep's channels. */
export const PARTS = [
  { name: "gyro", at: GYRO, has: HAS_GYRO, clipped: CONDITION.GYRO_CLIPPED },
  { name: "accel", at: ACCEL, has: HAS_ACCEL, clipped: CONDITION.ACCEL_CLIPPED },
  { name: "mag", at: MAG, has: HAS_MAG, clipped: CONDITION.MAG_CLIPPED },
] as const;

export const AXIS_NAMES = ["x", "y", "z"] as const;

/** rad/s, m/s² or µT. */
export interface PartLimits {
  readonly range: number;
  readonly count: number;
  /** Standard deviation of one reading: white noise up to half the sampling rate. */
  readonly noise: number;
  /** Readings a second, nominal. */
  readonly rateHz: number;
}

/** Limits of gyro, accel and mag, in this order; null where the model has no such part. */
export function limitsOf(sensor: HealthSensor, hubRateHz: number): readonly (PartLimits | null)[] {
  const { gyro, accel, mag } = sensor.model;
  const rateHz = Math.min(sensor.rateHz ?? hubRateHz, hubRateHz);
  const root = Math.sqrt(rateHz / 2);
  const micro = 1e-6 * STANDARD_GRAVITY;
  return [
    part(gyro.rangeDegPerS * RAD_PER_DEG, gyro.bits, gyro.noiseDegPerSPerSqrtHz * RAD_PER_DEG * root, rateHz),
    part(accel.rangeG * STANDARD_GRAVITY, accel.bits, accel.noiseMicroGPerSqrtHz * micro * root, rateHz),
    mag ? part(mag.rangeUT, mag.bits, mag.noiseUT, Math.min(mag.rateHz ?? rateHz, hubRateHz)) : null,
  ];
}

function part(range: number, bits: number, noise: number, rateHz: number): PartLimits {
  return { range, count: (2 * range) / 2 ** bits, noise, rateHz };
}
