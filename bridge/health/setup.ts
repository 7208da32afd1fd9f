/** What the detectors are told at the start. */
import type { SensorModel } from "../rig/sensor-model.ts";
import type { Thresholds } from "../rig/thresholds.ts";
import type { FlagBook } from "./flag-book.ts";

export interface HealthSensor {
  readonly name: string;
  /** 0 nose, 1 tail tip. */
  readonly station: number;
  readonly model: SensorModel;
  /** Readings a second, where this sensor gives fewer than the hub sweeps. */
  readonly rateHz?: number | undefined;
}

/** The magnetic field to expect, without a heading. */
export interface ExpectedField {
  readonly normUT: number;
  /** Angle below the horizontal, rad; positive on the northern half of the Earth. */
  readonly dipRad: number;
}

export interface HealthSetup {
  /** Nose to tail. */
  readonly sensors: readonly HealthSensor[];
  /** Nominal sweeps a second. */
  readonly rateHz: number;
  /** Of the body, nose to tail tip. */
  readonly lengthM: number;
  readonly thresholds: Thresholds;
  /** From the World Magnetic Model (site-field.ts); null where the rig file names no site. */
  readonly expectedField: ExpectedField | null;
  /** Local gravity, m/s²; null where the rig file names no site. */
  readonly gravityMPerS2: number | null;
  readonly book: FlagBook;
}
