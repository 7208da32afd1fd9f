/**
 * What all calibration procedures share: each is fed sweeps, says how far it is and what to do next, and ends with numbers
 * and their figures of merit, or with why there are none. Several sensors are calibrated at once; each has its own outcome.
 */
import type { Sweep } from "../sweep.ts";

export interface Progress {
  /** 0 to 1; 1 once there is nothing to wait for. */
  readonly share: number;
  /** What to do now, one sentence. */
  readonly text: string;
}

/** What came out for one sensor. */
export type Outcome<Numbers> =
  | { readonly ok: true; readonly numbers: Numbers; readonly warnings: readonly string[] }
  | { readonly ok: false; readonly reason: string };

export interface Procedure<Numbers> {
  /** Takes a decoded and timed sweep; allocates nothing. */
  observe(sweep: Sweep): void;
  progress(): Progress;
  /** One outcome a sensor, from what has been observed so far. */
  result(): readonly Outcome<Numbers>[];
}

export function refused(reason: string): { readonly ok: false; readonly reason: string } {
  return { ok: false, reason };
}
