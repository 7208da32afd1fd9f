/** Flags and marks as they travel to the dashboard and into flags.jsonl. */

export type Severity = "notice" | "caution" | "alarm";

/** Kinds of flags, in plain words of the trade. */
export type FlagKind =
  | "gyro saturation"
  | "accel saturation"
  | "mag saturation"
  | "low headroom"
  | "magnetic interference"
  | "magnetic interference at several sensors"
  | "rig-wide magnetic interference"
  | "alternating field"
  | "alternating field at several sensors"
  | "rig-wide alternating field"
  | "heading held by the body"
  | "lost samples"
  | "duplicate sweeps"
  | "late sweeps"
  | "corrupt packets"
  | "link silent"
  | "stuck axis"
  | "sensor read errors"
  | "sensor flipped"
  | "mounting changed"
  | "sensors swapped"
  | "noise at rest"
  | "gyro bias"
  | "gravity at rest"
  | "field at rest"
  | "on-board fusion differs"
  | "recording trouble"
  | "disk nearly full"
  | "supply low"
  | "hub temperature"
  | "hub fault"
  | "clock drift"
  | "hub restarted";

export interface Flag {
  /** Counts flags of this run from 1. */
  readonly id: number;
  readonly kind: FlagKind;
  /** Index of the sensor, or -1 for the whole rig. */
  readonly sensor: number;
  severity: Severity;
  /** Hub time, s. */
  readonly startS: number;
  /** Hub time, s; null while open. */
  endS: number | null;
  /** What was measured: "7 % left on y", "field 31 % off". Updated while open. */
  detail: string;
  /** One sentence: what to do next. */
  readonly advice: string;
}

export interface Mark {
  /** Hub time, s. */
  readonly timeS: number;
  readonly text: string;
  /** Who made it. */
  readonly from: "operator" | "hub button" | "trial";
}
