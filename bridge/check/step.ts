/** What all steps of the release check share. Each is fed sweeps, and says how far it is and what it found so far. */
import type { ClockCounters } from "../clock/hub-clock.ts";
import type { HubStatus, LinkCounters } from "../link/packets.ts";
import type { CheckLimits } from "../rig/check-limits.ts";
import type { SensorPlace } from "../rig/rig.ts";
import type { SensorModel } from "../rig/sensor-model.ts";
import type { Thresholds } from "../rig/thresholds.ts";
import type { Sweep } from "../sweep.ts";
import type { CheckFigure, CheckReason } from "../wire/check.ts";
import type { FlagKind } from "../wire/flag.ts";

/** What the link has counted so far. */
export interface LinkReadings {
  readonly counters: Readonly<LinkCounters>;
  readonly clock: Readonly<ClockCounters>;
  /** Hub's clock against the computer's, parts per million; null while not known. */
  readonly driftPpm: number | null;
}

/** What the rest detector tells (health/rest-meter.ts): SI, one a sensor, but three of the bias. NaN where there is none. */
export interface RestReadings {
  /** Sensors whose window has ended with this sweep. */
  readonly windowEnded: Uint8Array;
  readonly window: Readonly<
    Record<"stillS" | "gyroBias" | "gravity" | "fieldUT" | "gyroNoise" | "accelNoise", Float64Array>
  >;
}

export interface CheckSetup {
  readonly sensors: readonly SensorPlace[];
  /** One a sensor. */
  readonly models: readonly SensorModel[];
  readonly rateHz: number;
  readonly lengthM: number;
  readonly limits: Readonly<CheckLimits & Thresholds>;
  /** At the site, m/s². */
  readonly gravity: number;
  /** The Earth's at the site, µT; null where the rig names no site. */
  readonly fieldUT: number | null;
  /** Whether the hub's packets carry its supply. */
  readonly hasStatus: boolean;
  /** As they are now. */
  readonly readings: () => LinkReadings;
  readonly rest: () => RestReadings;
}

/** What a step found. */
export interface Finding {
  /** 0 to 1; 1 once enough was seen. */
  readonly share: number;
  /** What is still missing. */
  readonly missing: readonly CheckReason[];
  readonly figures: readonly JudgedFigure[];
  /** Faults that are no figure's. */
  readonly faults: readonly CheckReason[];
  readonly notes: readonly string[];
}

export interface JudgedFigure extends CheckFigure {
  /** What to do where it is outside its limits. */
  readonly advice: string;
}

export interface Step {
  /** One sentence. */
  readonly toDo: string;
  /** Takes a sweep that went through the pipeline. */
  observe(sweep: Sweep): void;
  status?(status: HubStatus, timeS: number): void;
  /** @param isOut sensors left out on purpose, by index */
  finding(isOut: readonly boolean[]): Finding;
  /** Flags that its own figures judge better. */
  ignores?(kind: FlagKind): boolean;
  /** Nothing on this rig to check. */
  readonly notNeeded?: string | undefined;
}

export interface FigureOptions {
  readonly name: string;
  readonly unit: string;
  readonly digits: number;
  readonly advice: string;
  readonly sensor?: number;
  readonly least?: number;
  readonly most?: number;
}

/** A figure, rounded as it is shown, and judged before it is rounded. One that is not known is not judged. */
export function figure(value: number, options: FigureOptions): JudgedFigure {
  const { name, unit, digits, advice, sensor = -1, least, most } = options;
  const known = Number.isFinite(value);
  return {
    name,
    sensor,
    unit,
    value: known ? rounded(value, digits) : null,
    digits,
    least: least === undefined ? null : rounded(least, digits),
    most: most === undefined ? null : rounded(most, digits),
    ok: !known || ((least === undefined || value >= least) && (most === undefined || value <= most)),
    advice,
  };
}

/** Indices of the sensors that are checked. */
export function inUse(isOut: readonly boolean[]): number[] {
  return isOut.flatMap((out, i) => (out ? [] : [i]));
}

/** Infinity where there are none. */
export function lowest(values: readonly number[]): number {
  return values.reduce((a, b) => Math.min(a, b), Number.POSITIVE_INFINITY);
}

function rounded(value: number, digits: number): number {
  const scale = 10 ** digits;
  // Adding 0 turns a negative zero into zero.
  return Math.round(value * scale) / scale + 0;
}
