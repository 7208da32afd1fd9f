/** Questions about single sensors that several lanes and panels ask. */
import type { FlagKind, Severity } from "../../bridge/wire/flag.ts";
import { TRUST_WORDS } from "../../bridge/wire/trust.ts";
import type { ViewState } from "./view-state.ts";

/** Numbers per sensor in a frame. */
export const GYRO_HEADROOM = 0;
export const ACCEL_HEADROOM = 1;
export const FIELD_OFF = 2;
export const DELIVERED = 3;
const NUMBERS = 4;

const SEVERITIES: readonly Severity[] = ["notice", "caution", "alarm"];

export function sensorNumber(view: ViewState, sensor: number, which: number): number {
  return view.frame.sensorNumbers[sensor * NUMBERS + which] ?? Number.NaN;
}

/** The sensor has been away so long that its orientation means nothing. */
export function sensorLost(view: ViewState, sensor: number): boolean {
  return trustWord(view, sensor) === "lost";
}

/** How far a sensor's orientation can be believed, in a word. */
export function trustWord(view: ViewState, sensor: number): string {
  return TRUST_WORDS[view.frame.sensorStates[sensor * 2]!] ?? "";
}

/** 0 for a notice up to 2 for an alarm. */
export function severityRank(severity: Severity): number {
  return SEVERITIES.indexOf(severity);
}

/** Worst severity among the open flags on a sensor, or null; of some kinds only if `kinds` are given. */
export function openSeverity(view: ViewState, sensor: number, kinds?: readonly FlagKind[]): Severity | null {
  let worst: Severity | null = null;
  for (const flag of view.flags?.open ?? []) {
    if (flag.sensor !== sensor || kinds?.includes(flag.kind) === false) continue;
    if (worst === null || severityRank(flag.severity) > severityRank(worst)) worst = flag.severity;
  }
  return worst;
}
